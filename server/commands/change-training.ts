import type { TrainingInput, TrainingView } from "../../shared/schemas/training";
import { recordAudit } from "../lib/audit";
import { changesBetween, isUnchanged } from "../lib/changes";
import { execute } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { checkTraining } from "./check-training";
import { writeAttendance } from "./record-training";

/** Puts a training right, who was there as well; the trail keeps what stood. The training's row is locked. */
export async function changeTraining(
  actor: Actor,
  site: { id: string; timeZone: string },
  before: TrainingView,
  input: TrainingInput,
): Promise<void> {
  if (before.struckReason !== null) throw new AppError("nothing-to-do", 409);
  if (input.siteId !== before.siteId) throw unprocessable([issue(["siteId"], "site-stays")]);
  const workerIds = (await checkTraining(site, input)).toSorted();
  const { employeeNumbers: _, ...facts } = input;
  const changes = changesBetween(
    { ...before, workerIds: before.attendance.map(({ id }) => id).toSorted() },
    { ...facts, workerIds },
  );
  if (isUnchanged(changes)) return;
  await execute(
    `UPDATE training_sessions SET held_on = $2, title = $3, duration_min = $4, file_id = $5, revision = revision + 1 WHERE id = $1`,
    [before.id, facts.heldOn, facts.title, facts.durationMin, facts.fileId],
  );
  await writeAttendance(actor.organizationId, before.id, workerIds);
  await recordAudit(actor, {
    action: "change-training",
    subjectKind: "training",
    subjectId: before.id,
    values: changes,
  });
}
