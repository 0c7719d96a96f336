import { randomUUID } from "node:crypto";
import type { RefusalInput } from "../../shared/schemas/fit";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { execute } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import { type Actor, findVisible } from "../lib/policy";
import { ProtectorModel } from "../models/protector";
import type { Worker } from "../models/worker";
import { protectorPolicy } from "../policies";

/**
 * That a worker would not, did not or cannot wear a device, and why. Returns its id.
 *
 * @throws AppError not-found or invalid
 */
export async function recordRefusal(
  actor: Actor,
  worker: Worker,
  site: { timeZone: string },
  { modelId, kind, happenedOn, reason }: RefusalInput,
): Promise<string> {
  if (modelId !== null) await findVisible(ProtectorModel, protectorPolicy, modelId, actor);
  const today = todayAt(site.timeZone);
  const issues = dateIssues(["happenedOn"], happenedOn);
  if (happenedOn > today) issues.push(issue(["happenedOn"], "in-the-future", { today }));
  if (issues.length > 0) throw unprocessable(issues);
  const id = randomUUID();
  await execute(
    `INSERT INTO protector_refusals (id, organization_id, site_id, worker_id, model_id, kind, happened_on, reason, author_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9)`,
    [
      id,
      actor.organizationId,
      worker.siteId,
      worker.id,
      modelId,
      kind,
      happenedOn,
      reason,
      actor.userId,
    ],
  );
  await recordAudit(actor, {
    action: "record-refusal",
    subjectKind: "worker",
    subjectId: worker.id,
    // The reason may be a medical one: it stands in its own table and nowhere else.
    values: { refusalId: id, modelId, kind, happenedOn },
  });
  return id;
}
