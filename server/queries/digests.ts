import type { DigestInput, DigestView } from "../../shared/schemas/digest";
import { row } from "../lib/db";
import type { Actor } from "../lib/policy";

/** One's own choice; of nobody else is it known. */
export async function ownDigest(actor: Actor): Promise<DigestView> {
  const found = await row<DigestInput & { revision: number }>(
    "SELECT hour, revision FROM digest_choices WHERE user_id = :userId",
    { userId: actor.userId },
  );
  const latest = await row<{ state: string; error: string | null }>(
    "SELECT state, last_error AS error FROM digests WHERE user_id = :userId AND state IN ('sent', 'bounced') ORDER BY date DESC LIMIT 1",
    { userId: actor.userId },
  );
  return {
    hour: found?.hour ?? null,
    revision: found?.revision ?? 0,
    email: actor.email,
    bounced: latest?.state === "bounced" ? latest.error : null,
  };
}
