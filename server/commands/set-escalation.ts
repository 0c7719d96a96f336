import type { EscalationView } from "../../shared/schemas/follow-up";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";

/** Whom overdue findings of a site go up to from now on; null: nobody. The site's row is locked. */
export async function setEscalation(
  actor: Actor,
  before: EscalationView,
  userId: string | null,
): Promise<void> {
  if (before.userId === userId) return;
  if (userId !== null && !before.people.some(({ id }) => id === userId))
    throw unprocessable([issue(["userId"], "not-of-this-site")]);
  await execute("UPDATE sites SET escalation_user_id = $2, revision = revision + 1 WHERE id = $1", [
    before.siteId,
    userId,
  ]);
  await recordAudit(actor, {
    action: "set-escalation",
    subjectKind: "site",
    subjectId: before.siteId,
    values: { escalationUserId: { from: before.userId, to: userId } },
  });
}
