import type { WorkerInput } from "../../shared/schemas/worker";
import { recordAudit } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { changesBetween, isUnchanged } from "../lib/changes";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import type { Worker } from "../models/worker";
import { checkWorker } from "./check-worker";
import { markDaysStale } from "./mark-days-stale";
import { saveRequirementReason } from "./save-requirement-reason";

/** A personal requirement holds from the site's today on. */
export async function changeWorker(
  actor: Actor,
  worker: Worker,
  site: Site,
  input: WorkerInput,
): Promise<void> {
  await checkWorker(actor, input);
  const { requirementReason, ...facts } = input;
  const changes = changesBetween(worker, facts);
  const isRequirementReasonChanged = await saveRequirementReason(actor, worker, requirementReason);
  if (isUnchanged(changes) && !isRequirementReasonChanged) return;
  await worker.update({ ...facts, revision: worker.revision + 1 });
  const values = {
    ...changes,
    ...(isRequirementReasonChanged ? { isRequirementReasonChanged } : {}),
  };
  await recordAudit(actor, {
    action: "change-worker",
    subjectKind: "worker",
    subjectId: worker.id,
    values,
  });
  if (changes.mustWear || changes.personalTargetDb) {
    await markDaysStale(actor.organizationId, {
      workerId: worker.id,
      fromDate: todayAt(site.timeZone),
    });
  }
}
