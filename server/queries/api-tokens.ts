import type { TokenView } from "../../shared/schemas/api-token";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { tokenPolicy } from "../policies";

type Row = Omit<TokenView, "createdAt" | "expiresAt" | "lastUsedAt"> & {
  createdAt: Date;
  expiresAt: Date;
  lastUsedAt: Date | null;
};

/** Tokens that the actor may see, those that work first; the latest 200. */
export async function listTokens(
  actor: Actor,
  { id = null, userId = null }: { id?: string | null; userId?: string | null },
): Promise<TokenView[]> {
  const found = await rows<Row>(
    `SELECT x.* FROM (
       SELECT t.id, t.user_id AS "userId", t.name, to_jsonb(t.scopes) AS scopes, t.created_at AS "createdAt", t.expires_at AS "expiresAt",
         t.last_used_at AS "lastUsedAt", CASE WHEN t.revoked_at IS NOT NULL THEN 'ended' WHEN t.expires_at <= now() THEN 'expired' ELSE 'works' END AS state
       FROM api_tokens t WHERE ${visible(tokenPolicy, actor, "t")} AND (CAST(:id AS uuid) IS NULL OR t.id = :id)
         AND (CAST(:userId AS uuid) IS NULL OR t.user_id = :userId)) x
     ORDER BY x.state <> 'works', x."createdAt" DESC, x.id LIMIT 200`,
    { id, userId },
  );
  return found.map(({ createdAt, expiresAt, lastUsedAt, ...token }) => ({
    ...token,
    createdAt: createdAt.toISOString(),
    expiresAt: expiresAt.toISOString(),
    lastUsedAt: lastUsedAt?.toISOString() ?? null,
  }));
}
