import type { ProtectorRevisionInput } from "../../shared/schemas/protector";
import { recordAudit } from "../lib/audit";
import { dateIssues } from "../lib/calendar";
import { execute, row } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { ProtectorModel } from "../models/protector";
import { markDaysStale } from "./mark-days-stale";

/** A model's data from a date on, which may lie back: who wore it since then is judged again. The model's row is locked. */
export async function addProtectorRevision(
  actor: Actor,
  model: ProtectorModel,
  input: ProtectorRevisionInput,
  under: string[] = [],
): Promise<void> {
  const number = await insertProtectorRevision(actor, model, input, under);
  await recordAudit(actor, {
    action: "add-protector-revision",
    subjectKind: "protector",
    subjectId: model.id,
    values: { number, ...input },
  });
  await markDaysStale(actor.organizationId, { modelId: model.id, fromDate: input.effectiveFrom });
}

/** The row alone, for the change itself and for its preview. */
export async function insertProtectorRevision(
  actor: Actor,
  model: ProtectorModel,
  input: ProtectorRevisionInput,
  under: string[] = [],
): Promise<number> {
  const { effectiveFrom, reason, ...data } = input;
  const last = await row<{ number: number }>(
    "SELECT coalesce(max(number), 0) AS number FROM protector_model_revisions WHERE model_id = :id",
    { id: model.id },
  );
  const number = (last?.number ?? 0) + 1;
  const issues = dateIssues([...under, "effectiveFrom"], effectiveFrom);
  if (number > 1 && reason === null) issues.push(issue([...under, "reason"], "reason-needed"));
  if (issues.length > 0) throw unprocessable(issues);
  await execute(
    `INSERT INTO protector_model_revisions (organization_id, model_id, number, effective_from, data, reason, author_id)
     VALUES ($1, $2, $3, $4, $5::jsonb, $6, $7)`,
    [
      actor.organizationId,
      model.id,
      number,
      effectiveFrom,
      JSON.stringify(data),
      reason,
      actor.userId,
    ],
  );
  return number;
}
