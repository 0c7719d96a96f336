import type { DigestInput, DigestView } from "../../shared/schemas/digest";
import { row } from "../lib/db";
import type { Actor } from "../lib/policy";

/** One's own choice; of nobody else is it known. */
export async function ownDigest(actor: Actor): Promise<DigestView> {
  const found = await row<DigestInput & { revision: number }>(
    "SELECT hour, revision FROM digest_choices WHERE user_id = :userId",
    { userId: actor.userId },
  );
  return { hour: found?.hour ?? null, revision: found?.revision ?? 0, email: actor.email };
}
