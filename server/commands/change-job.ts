import type { JobInput } from "../../shared/schemas/task";
import { recordAudit } from "../lib/audit";
import { changesBetween, isUnchanged } from "../lib/changes";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Job } from "../models/task";
import { checkNominalDay, saveNominalDay } from "./save-nominal-day";

/** The nominal day fills in a day grid; days already entered are not touched by it. */
export async function changeJob(
  actor: Actor,
  job: Job,
  before: JobInput,
  input: JobInput,
): Promise<void> {
  if (input.siteId !== job.siteId) throw unprocessable([issue(["siteId"], "site-fixed")]);
  await checkNominalDay(actor, job.siteId, input.tasks);
  const changes = changesBetween(before, input);
  if (isUnchanged(changes)) return;
  await job.update({ name: input.name, isArchived: input.isArchived, revision: job.revision + 1 });
  if (changes.tasks) await saveNominalDay(actor, job, input.tasks);
  await recordAudit(actor, {
    action: "change-job",
    subjectKind: "job",
    subjectId: job.id,
    values: changes,
  });
}
