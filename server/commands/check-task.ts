import { findLevelDoubts } from "../../shared/schemas/level-doubts";
import type { TaskLevelInput } from "../../shared/schemas/task";
import { issue, unprocessable } from "../lib/errors";
import { type Actor, findVisible } from "../lib/policy";
import { Area } from "../models/site";
import { programmePolicy } from "../policies";

/** @throws AppError not-found or invalid, unless the area is one of the task's own site. */
export async function checkAreaOfTask(
  actor: Actor,
  siteId: string,
  areaId: string | null,
): Promise<void> {
  if (areaId === null) return;
  const area = await findVisible(Area, programmePolicy, areaId, actor);
  if (area.siteId !== siteId) throw unprocessable([issue(["areaId"], "area-of-other-site")]);
}

/** @throws AppError invalid where a level contradicts its bands or samples and nobody has said that it is right. */
export function checkLevel(input: TaskLevelInput, under: readonly string[] = []): void {
  const open = findLevelDoubts(input).filter(({ code }) => !input.acceptedDoubts.includes(code));
  if (open.length > 0)
    throw unprocessable(
      open.map(({ code, params }) => issue([...under, "levelDb"], code, { ...params })),
    );
}
