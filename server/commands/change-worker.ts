import type { WorkerInput } from "../../shared/schemas/worker";
import { recordAudit } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { type Changes, changesBetween, isUnchanged } from "../lib/changes";
import { rows } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import type { Worker } from "../models/worker";
import { daysAfterLeaving } from "../queries/days-after-leaving";
import { checkWorker } from "./check-worker";
import { endCrewsElsewhere, endWithLeaving } from "./end-with-leaving";
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
  await checkLeaving(worker, input);
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
  if (changes.leftOn && facts.leftOn !== null)
    await endWithLeaving(actor, [{ id: worker.id, leftOn: facts.leftOn }]);
  if (changes.siteId) await endCrewsElsewhere(actor, [worker.id], todayAt(site.timeZone));
  if (changes.language) await carryLanguage(actor, worker.id, changes.language);
  if (changes.mustWear || changes.personalTargetDb) {
    await markDaysStale(actor.organizationId, {
      workerId: worker.id,
      fromDate: todayAt(site.timeZone),
    });
  }
}

/** @throws AppError invalid where a shift stands after the day of leaving: it would be nobody's. */
async function checkLeaving({ id, leftOn: before }: Worker, { leftOn }: WorkerInput) {
  if (leftOn === null || leftOn === before) return;
  const lastOn = (await daysAfterLeaving([{ id, leftOn }])).get(id);
  if (lastOn) throw unprocessable([issue(["leftOn"], "shift-after-leaving", { lastOn })]);
}

/** The worker's sign-in reads and is written to in the record's language until its owner has chosen another. */
async function carryLanguage(actor: Actor, workerId: string, change: Changes[string]) {
  const carried = await rows<{ id: string }>(
    `UPDATE users SET language = :to, revision = revision + 1
     WHERE worker_id = :workerId AND language = :from AND revoked_at IS NULL
       AND NOT EXISTS (SELECT 1 FROM audit_events e WHERE e.subject_kind = 'user' AND e.subject_id = users.id AND e.action = 'set-own-language')
     RETURNING id`,
    { workerId, ...change },
  );
  for (const { id } of carried)
    await recordAudit(actor, {
      action: "change-user",
      subjectKind: "user",
      subjectId: id,
      values: { language: change },
    });
}
