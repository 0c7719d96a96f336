import type { TokenInput } from "../../shared/schemas/api-token";
import { recordAudit } from "../lib/audit";
import { execute, row } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { newSecret, secretHash } from "../lib/secret";

/** Working tokens that one person may have. */
const AT_MOST = 20;

/** A token for another system, which acts as the actor within its scopes. Gives it once: only its hash is kept. */
export async function makeToken(
  actor: Actor,
  { name, scopes, days }: TokenInput,
): Promise<{ id: string; token: string }> {
  const held = await row<{ count: number }>(
    "SELECT count(*)::int AS count FROM api_tokens WHERE user_id = :userId AND revoked_at IS NULL AND expires_at > now()",
    { userId: actor.userId },
  );
  if (held && held.count >= AT_MOST)
    throw unprocessable([issue(["name"], "tokens-enough", { count: AT_MOST })]);
  const token = newSecret(actor.organizationId);
  const made = await row<{ id: string }>(
    `INSERT INTO api_tokens (organization_id, user_id, name, scopes, secret_hash, expires_at)
     VALUES (:organizationId, :userId, :name, ARRAY[:scopes]::text[], decode(:hash, 'hex'), now() + make_interval(days => :days)) RETURNING id`,
    {
      organizationId: actor.organizationId,
      userId: actor.userId,
      name,
      scopes: [...new Set(scopes)],
      hash: secretHash(token).toString("hex"),
      days,
    },
  );
  if (!made) throw new Error("a token was not made");
  await recordAudit(actor, {
    action: "make-token",
    subjectKind: "user",
    subjectId: actor.userId,
    values: { name, scopes, days },
  });
  return { id: made.id, token };
}

/** It opens nothing from the next request on. */
export async function endToken(
  actor: Actor,
  token: { id: string; userId: string; name: string },
): Promise<void> {
  const ended = await execute(
    "UPDATE api_tokens SET revoked_at = now() WHERE id = $1 AND revoked_at IS NULL AND expires_at > now()",
    [token.id],
  );
  if (ended === 0) throw new AppError("nothing-to-do", 409);
  await recordAudit(actor, {
    action: "end-token",
    subjectKind: "user",
    subjectId: token.userId,
    values: { name: token.name },
  });
}
