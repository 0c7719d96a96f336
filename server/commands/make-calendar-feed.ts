import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";
import { newSecret, secretHash } from "../lib/secret";

/** A private address for the actor's own calendar; one that there was before ends here. Gives its secret, once. */
export async function makeCalendarFeed(actor: Actor): Promise<string> {
  await endFeed(actor);
  const secret = newSecret(actor.organizationId);
  await execute(
    "INSERT INTO calendar_feeds (organization_id, user_id, secret_hash) VALUES ($1, $2, $3)",
    [actor.organizationId, actor.userId, secretHash(secret)],
  );
  await recordAudit(actor, {
    action: "make-calendar-feed",
    subjectKind: "user",
    subjectId: actor.userId,
    values: {},
  });
  return secret;
}

const endFeed = (actor: Actor): Promise<number> =>
  execute(
    "UPDATE calendar_feeds SET revoked_at = now() WHERE user_id = $1 AND revoked_at IS NULL",
    [actor.userId],
  );

/** The address leads nowhere from now on. */
export async function endCalendarFeed(actor: Actor): Promise<void> {
  if ((await endFeed(actor)) === 0) return;
  await recordAudit(actor, {
    action: "end-calendar-feed",
    subjectKind: "user",
    subjectId: actor.userId,
    values: {},
  });
}
