import type { MailHookEvent, MailHookReply } from "../../shared/schemas/mail-event";
import { recordAudit } from "../lib/audit";
import { execute, inTransaction, row } from "../lib/db";

/** How much is kept of what a mail server said. */
const SAID_CHARACTERS = 1000;

/** What a server says of a mail that it could not deliver, where it says nothing closer (RFC 3463, 3.1). */
const UNDELIVERED = "5.0.0";

interface ReportedMail {
  mail: "notice" | "trail-head" | "digest" | "escalation";
  id: string;
  organizationId: string;
  /** Of an escalation. */
  siteId: string | null;
}

/**
 * Keeps what became of a mail, once however often it is reported. A notice that came back is bounced from then on; one that
 * was sent again meanwhile, under another Message-ID, is not what the report speaks of.
 */
export async function recordMailEvent(
  event: MailHookEvent,
  way: "hook" | "report",
): Promise<MailHookReply> {
  const { messageId } = event;
  const reported = await inTransaction(
    { settings: { "app.mail_report": messageId }, readOnly: true },
    () =>
      row<ReportedMail>(
        `SELECT 'notice' AS mail, id, organization_id AS "organizationId", NULL::uuid AS "siteId" FROM notices WHERE message_id = :messageId
         UNION ALL SELECT 'trail-head', id, organization_id, NULL FROM trail_mails WHERE id = reported_mail()
         UNION ALL SELECT 'digest', id, organization_id, NULL FROM digests WHERE id = reported_mail()
         UNION ALL SELECT 'escalation', id, organization_id, site_id FROM escalations WHERE id = reported_mail()`,
        { messageId },
      ),
  );
  if (!reported) return { isKnown: false, isNew: false };
  const { organizationId } = reported;
  const isNew = await inTransaction({ organizationId }, () =>
    reported.mail === "notice"
      ? recordOfNotice(reported, event, way)
      : recordOfOther({ ...reported, mail: reported.mail }, event),
  );
  return { isKnown: true, isNew };
}

async function recordOfNotice(
  { id: noticeId, organizationId }: ReportedMail,
  { id, kind, messageId, status = null, said = null }: MailHookEvent,
  way: "hook" | "report",
): Promise<boolean> {
  const stored = await execute(
    `INSERT INTO mail_events (organization_id, notice_id, event_id, kind, way, status, said)
     VALUES ($1, $2, $3, $4, $5, $6, $7) ON CONFLICT (organization_id, event_id) DO NOTHING`,
    [
      organizationId,
      noticeId,
      `${way} ${id}`,
      kind,
      way,
      status,
      said?.slice(0, SAID_CHARACTERS) ?? null,
    ],
  );
  if (stored === 0) return false;
  const changed =
    kind === "bounced"
      ? await execute(
          `UPDATE notices SET state = 'bounced', last_error = $2, revision = revision + 1
           WHERE id = $1 AND state IN ('sending', 'sent', 'possibly-sent') AND message_id = $3`,
          [noticeId, status ?? UNDELIVERED, messageId],
        )
      : 0;
  if (changed > 0)
    await recordAudit(
      { organizationId },
      {
        action: "bounce-notice",
        subjectKind: "notice",
        subjectId: noticeId,
        values: { messageId, status },
      },
    );
  return true;
}

const BOUNCED: Readonly<Record<Exclude<ReportedMail["mail"], "notice">, string>> = {
  "trail-head":
    "UPDATE trail_mails SET state = 'bounced', last_error = $2 WHERE id = $1 AND state IN ('waiting', 'sent')",
  digest:
    "UPDATE digests SET state = 'bounced', last_error = $2 WHERE id = $1 AND state IN ('waiting', 'sent')",
  escalation:
    "UPDATE escalations SET bounced_at = now(), last_error = $2 WHERE id = $1 AND bounced_at IS NULL",
};

/** Of a mail that is no notice only that it came back is kept: whoever relies on it has to be told. */
async function recordOfOther(
  { mail, id, organizationId, siteId }: ReportedMail & { mail: keyof typeof BOUNCED },
  { kind, messageId, status = null }: MailHookEvent,
): Promise<boolean> {
  if (kind !== "bounced") return false;
  const changed = await execute(BOUNCED[mail], [id, status ?? UNDELIVERED]);
  // A daily mail is nobody's evidence; its row is in the trail as any other.
  if (changed > 0 && mail !== "digest")
    await recordAudit(
      { organizationId },
      {
        action: `bounce-${mail}`,
        subjectKind: siteId === null ? "organization" : "site",
        subjectId: siteId ?? organizationId,
        values: { messageId, status },
      },
    );
  return changed > 0;
}
