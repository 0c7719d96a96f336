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
  if (!notice) return recordOtherMail(messageId, kind, status);
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

interface OtherMail {
  id: string;
  organizationId: string;
  mail: "trail-head" | "digest" | "escalation";
  /** Of an escalation. */
  siteId: string | null;
}

const BOUNCED: Readonly<Record<OtherMail["mail"], string>> = {
  "trail-head":
    "UPDATE trail_mails SET state = 'bounced', last_error = $2 WHERE id = $1 AND state IN ('waiting', 'sent')",
  digest:
    "UPDATE digests SET state = 'bounced', last_error = $2 WHERE id = $1 AND state IN ('waiting', 'sent')",
  escalation:
    "UPDATE escalations SET bounced_at = now(), last_error = $2 WHERE id = $1 AND bounced_at IS NULL",
};

/** Of a mail that is no notice only that it came back is kept: whoever relies on it has to be told. */
async function recordOtherMail(
  messageId: string,
  kind: MailHookEvent["kind"],
  status: string | null,
): Promise<MailHookReply> {
  const found = await inTransaction(
    { settings: { "app.mail_report": messageId }, readOnly: true },
    () =>
      row<OtherMail>(
        `SELECT id, organization_id AS "organizationId", 'trail-head' AS mail, NULL::uuid AS "siteId" FROM trail_mails WHERE id = reported_mail()
         UNION ALL SELECT id, organization_id, 'digest', NULL FROM digests WHERE id = reported_mail()
         UNION ALL SELECT id, organization_id, 'escalation', site_id FROM escalations WHERE id = reported_mail()`,
        {},
      ),
  );
  if (!found) return { isKnown: false, isNew: false };
  if (kind !== "bounced") return { isKnown: true, isNew: false };
  const { id, organizationId, mail, siteId } = found;
  return inTransaction({ organizationId }, async () => {
    const changed = await execute(BOUNCED[mail], [id, status ?? "5.0.0"]);
    // A daily mail is nobody's evidence; its row is in the trail as any other.
    if (changed > 0 && mail !== "digest")
      await recordAudit(
        { organizationId },
        {
          action: mail === "trail-head" ? "bounce-trail-head" : "bounce-escalation",
          subjectKind: siteId === null ? "organization" : "site",
          subjectId: siteId ?? organizationId,
          values: { messageId, status },
        },
      );
    return { isKnown: true, isNew: changed > 0 };
  });
}
