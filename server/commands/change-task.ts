import type { TaskInput } from "../../shared/schemas/task";
import { recordAudit } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { changesBetween, isUnchanged } from "../lib/changes";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import type { Task } from "../models/task";
import { checkAreaOfTask } from "./check-task";
import { markDaysStale } from "./mark-days-stale";

/** Another area brings another zone and other assignments, from the site's today on. */
export async function changeTask(
  actor: Actor,
  task: Task,
  site: Site,
  input: TaskInput,
): Promise<void> {
  if (input.siteId !== task.siteId) throw unprocessable([issue(["siteId"], "site-fixed")]);
  await checkAreaOfTask(actor, task.siteId, input.areaId);
  const changes = changesBetween(task, input);
  if (isUnchanged(changes)) return;
  await task.update({ ...input, revision: task.revision + 1 });
  await recordAudit(actor, {
    action: "change-task",
    subjectKind: "task",
    subjectId: task.id,
    values: changes,
  });
  if (changes.areaId) {
    await markDaysStale(actor.organizationId, {
      taskId: task.id,
      fromDate: todayAt(site.timeZone),
    });
  }
}
