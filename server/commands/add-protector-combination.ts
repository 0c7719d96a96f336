import type { CombinationInput } from "../../shared/schemas/protector";
import { recordAudit } from "../lib/audit";
import { dateIssues } from "../lib/calendar";
import { execute, row } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { markDaysStale } from "./mark-days-stale";

/** What two models take off when worn together, from a date on: who wore them so since then is judged again. The inner model's row is locked. */
export async function addProtectorCombination(
  actor: Actor,
  input: CombinationInput,
): Promise<void> {
  const { innerModelId, outerModelId, effectiveFrom } = input;
  const number = await insertCombination(actor, input);
  await recordAudit(actor, {
    action: "add-protector-combination",
    subjectKind: "protector",
    subjectId: innerModelId,
    values: { number, ...input },
  });
  await markDaysStale(actor.organizationId, {
    pair: { innerModelId, outerModelId },
    fromDate: effectiveFrom,
  });
}

/** The row alone, for the change itself and for its preview. */
export async function insertCombination(actor: Actor, input: CombinationInput): Promise<number> {
  const { innerModelId, outerModelId, effectiveFrom, bands, reason } = input;
  const last = await row<{ number: number }>(
    `SELECT coalesce(max(number), 0) AS number FROM protector_combinations
     WHERE inner_model_id = :innerModelId AND outer_model_id = :outerModelId`,
    { innerModelId, outerModelId },
  );
  const number = (last?.number ?? 0) + 1;
  const issues = dateIssues(["effectiveFrom"], effectiveFrom);
  if (number > 1 && reason === null) issues.push(issue(["reason"], "reason-needed"));
  if (issues.length > 0) throw unprocessable(issues);
  await execute(
    `INSERT INTO protector_combinations (organization_id, inner_model_id, outer_model_id, number, effective_from, bands, reason, author_id)
     VALUES ($1, $2, $3, $4, $5, $6::jsonb, $7, $8)`,
    [
      actor.organizationId,
      innerModelId,
      outerModelId,
      number,
      effectiveFrom,
      JSON.stringify(bands),
      reason,
      actor.userId,
    ],
  );
  return number;
}
