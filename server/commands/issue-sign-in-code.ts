import { randomInt } from "node:crypto";
import { hashCode } from "../auth/routes";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";
import type { Worker } from "../models/worker";

/** Without the letters and digits that a print lets one mistake for another. */
const alphabet = "ABCDEFGHJKLMNPQRSTUVWXYZ23456789";
const validDays = 30;

/**
 * A code that binds a sign-in to the worker, once; who left keeps the right to the own records. Only its hash is kept; an
 * older one that was not used ends here.
 */
export async function issueSignInCode(
  actor: Actor,
  worker: Worker,
): Promise<{ code: string; expiresAt: Date }> {
  const letters = Array.from({ length: 12 }, () => alphabet[randomInt(alphabet.length)]).join("");
  const code = letters.replace(/(.{4})(?=.)/g, "$1-");
  const expiresAt = new Date(Date.now() + validDays * 86_400_000);
  await execute(
    "UPDATE sign_in_codes SET expires_at = now() WHERE worker_id = $1 AND used_at IS NULL AND expires_at > now()",
    [worker.id],
  );
  await execute(
    "INSERT INTO sign_in_codes (organization_id, worker_id, code_hash, expires_at, issued_by) VALUES ($1, $2, $3, $4, $5)",
    [actor.organizationId, worker.id, hashCode(code), expiresAt.toISOString(), actor.userId],
  );
  await recordAudit(actor, {
    action: "issue-sign-in-code",
    subjectKind: "worker",
    subjectId: worker.id,
    values: { expiresAt },
  });
  return { code, expiresAt };
}
