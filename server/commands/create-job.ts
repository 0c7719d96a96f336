import type { JobInput } from "../../shared/schemas/task";
import { recordAudit } from "../lib/audit";
import type { Actor } from "../lib/policy";
import { Job } from "../models/task";
import { checkNominalDay, saveNominalDay } from "./save-nominal-day";

export async function createJob(actor: Actor, input: JobInput): Promise<Job> {
  const { tasks, ...facts } = input;
  await checkNominalDay(actor, facts.siteId, tasks);
  const job = await Job.create({ organizationId: actor.organizationId, ...facts });
  await saveNominalDay(actor, job, tasks);
  await recordAudit(actor, {
    action: "create-job",
    subjectKind: "job",
    subjectId: job.id,
    values: input,
  });
  return job;
}
