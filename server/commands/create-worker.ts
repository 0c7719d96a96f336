import type { WorkerInput } from "../../shared/schemas/worker";
import { recordAudit } from "../lib/audit";
import type { Actor } from "../lib/policy";
import { Worker } from "../models/worker";
import { checkWorker } from "./check-worker";
import { saveRequirementReason } from "./save-requirement-reason";

export async function createWorker(actor: Actor, input: WorkerInput): Promise<Worker> {
  await checkWorker(actor, input);
  const { requirementReason, ...facts } = input;
  const worker = await Worker.create({ organizationId: actor.organizationId, ...facts });
  const hasReason = await saveRequirementReason(actor, worker, requirementReason);
  const values = { ...facts, ...(hasReason ? { isRequirementReasonChanged: true } : {}) };
  await recordAudit(actor, {
    action: "create-worker",
    subjectKind: "worker",
    subjectId: worker.id,
    values,
  });
  return worker;
}
