import { rows } from "../lib/db";
import type { Actor } from "../lib/policy";

/** The latest that this person has been given of a crew and has not acknowledged. */
export async function waitingHandOver(
  actor: Actor,
  crewId: string,
): Promise<{ id: string; byName: string; givenAt: string } | null> {
  const [found] = await rows<{ id: string; byName: string; givenAt: Date }>(
    `SELECT h.id, u.name AS "byName", h.given_at AS "givenAt" FROM hand_overs h JOIN users u ON u.id = h.author_id
     WHERE h.crew_id = :crewId AND h.recipient_id = :userId AND NOT EXISTS (SELECT 1 FROM hand_over_receipts t WHERE t.hand_over_id = h.id)
     ORDER BY h.given_at DESC LIMIT 1`,
    { crewId, userId: actor.userId },
  );
  return found ? { ...found, givenAt: found.givenAt.toISOString() } : null;
}
