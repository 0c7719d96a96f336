import { execute, row } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";

/** What one person proposes and another decides; both tables have the same columns for it. */
type ProposalTable = "erasures" | "record_transfers";

/** Locks a proposal, so that nobody else decides it meanwhile, and says who made it; "" where there is none of that id. */
export async function lockProposal(table: ProposalTable, id: string): Promise<string> {
  const locked = await row<{ proposedBy: string }>(
    `SELECT proposed_by AS "proposedBy" FROM ${table} WHERE id = :id FOR UPDATE`,
    { id },
  );
  return locked?.proposedBy ?? "";
}

/**
 * Nobody approves what they proposed.
 *
 * @throws AppError own-proposal, or wrong-state where it was decided already.
 */
export async function approveProposal(
  actor: Actor,
  table: ProposalTable,
  id: string,
  proposedBy: string,
): Promise<void> {
  if (proposedBy === actor.userId) throw new AppError("own-proposal", 403);
  const approved = await execute(
    `UPDATE ${table} SET state = 'approved', approved_by = $2, approved_at = clock_timestamp(), updated_at = now(), revision = revision + 1
     WHERE id = $1 AND state = 'proposed'`,
    [id, actor.userId],
  );
  if (approved === 0) throw new AppError("wrong-state", 409);
}

/** @throws AppError wrong-state where it is in none of these states any more. */
export async function withdrawProposal(
  actor: Actor,
  table: ProposalTable,
  id: string,
  from: readonly ("proposed" | "approved")[],
): Promise<void> {
  const withdrawn = await execute(
    `UPDATE ${table} SET state = 'withdrawn', withdrawn_by = $2, updated_at = now(), revision = revision + 1
     WHERE id = $1 AND state = ANY (CAST($3 AS text[]))`,
    [id, actor.userId, `{${from.join(",")}}`],
  );
  if (withdrawn === 0) throw new AppError("wrong-state", 409);
}
