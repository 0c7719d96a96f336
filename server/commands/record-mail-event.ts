import type { MailHookEvent, MailHookReply } from "../../shared/schemas/mail-event";
import { recordAudit } from "../lib/audit";
import { execute, inTransaction, row } from "../lib/db";

/** How much is kept of what a mail server said. */
const SAID_CHARACTERS = 1000;

/**
 * Keeps what became of a mail, once however often it is reported. A notice that came back is bounced from then on; one that
 * was sent again meanwhile, under another Message-ID, is not what the report speaks of.
 */
export async function recordMailEvent(
  { id, kind, messageId, status = null, said = null }: MailHookEvent,
  way: "hook" | "report",
): Promise<MailHookReply> {
  const notice = await inTransaction(
    { settings: { "app.mail_report": messageId }, readOnly: true },
    () =>
      row<{ id: string; organizationId: string }>(
        `SELECT id, organization_id AS "organizationId" FROM notices WHERE message_id = :messageId`,
        { messageId },
      ),
  );
  if (!notice) return { isKnown: false, isNew: false };
  const { organizationId } = notice;
  return inTransaction({ organizationId }, async () => {
    const stored = await execute(
      `INSERT INTO mail_events (organization_id, notice_id, event_id, kind, way, status, said)
       VALUES ($1, $2, $3, $4, $5, $6, $7) ON CONFLICT (organization_id, event_id) DO NOTHING`,
      [
        organizationId,
        notice.id,
        `${way} ${id}`,
        kind,
        way,
        status,
        said?.slice(0, SAID_CHARACTERS) ?? null,
      ],
    );
    if (stored === 0) return { isKnown: true, isNew: false };
    const changed =
      kind === "bounced"
        ? await execute(
            `UPDATE notices SET state = 'bounced', last_error = $2, revision = revision + 1
             WHERE id = $1 AND state IN ('sending', 'sent', 'possibly-sent') AND message_id = $3`,
            [notice.id, status ?? "5.0.0", messageId],
          )
        : 0;
    if (changed > 0)
      await recordAudit(
        { organizationId },
        {
          action: "bounce-notice",
          subjectKind: "notice",
          subjectId: notice.id,
          values: { messageId, status },
        },
      );
    return { isKnown: true, isNew: true };
  });
}
