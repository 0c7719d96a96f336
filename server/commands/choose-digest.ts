import type { DigestInput } from "../../shared/schemas/digest";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { ownDigest } from "../queries/digests";

/** The hour of one's own daily mail, or none. */
export async function chooseDigest(
  actor: Actor,
  { hour }: DigestInput,
  seenRevision: number,
): Promise<void> {
  const before = await ownDigest(actor);
  await requireRevision(before, seenRevision, async () => before);
  if (before.hour === hour) return;
  await execute(
    `INSERT INTO digest_choices (user_id, organization_id, hour) VALUES ($1, $2, $3)
     ON CONFLICT (user_id) DO UPDATE SET hour = $3, chosen_at = now(), revision = digest_choices.revision + 1`,
    [actor.userId, actor.organizationId, hour],
  );
  await recordAudit(actor, {
    action: "choose-digest",
    subjectKind: "user",
    subjectId: actor.userId,
    values: { hour: { from: before.hour, to: hour } },
  });
}
