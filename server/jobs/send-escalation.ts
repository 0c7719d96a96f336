import { createI18n, isLocale } from "../../shared/i18n";
import { type EscalationFacts, escalationMail } from "../emails/escalation";
import type { Mail } from "../emails/frame";
import { recordAudit } from "../lib/audit";
import { execute, inTransaction, row, rows } from "../lib/db";
import type { JobPayloads } from "../lib/jobs";
import { type Mailer, retryUnlessSettled } from "../lib/mailer";

interface EscalationRow {
  email: string | null;
  language: string;
  sentAt: Date | null;
  subject: string | null;
  bodyText: string | null;
  bodyHtml: string | null;
  recipientName: string;
  organizationName: string;
  siteName: string;
}

/**
 * Tells the person whom a site names of what is overdue. A second attempt says word for word what the first said, under
 * the same Message-ID.
 *
 * @throws Error where the server did not take it for now: the queue tries again later.
 */
export async function sendEscalation(
  { organizationId, escalationId }: JobPayloads["send-escalation"],
  mailer: Mailer,
  publicUrl: string,
): Promise<void> {
  const claimed = await inTransaction({ organizationId }, () => claim(escalationId, publicUrl));
  if (!claimed) return;
  const outcome = await mailer.send({
    to: claimed.to,
    messageId: `<${escalationId}@dinward>`,
    ...claimed.mail,
  });
  await inTransaction({ organizationId }, async () => {
    if (outcome.kind !== "sent") {
      await execute("UPDATE escalations SET last_error = $2 WHERE id = $1", [
        escalationId,
        outcome.error,
      ]);
      return;
    }
    await execute("UPDATE escalations SET sent_at = now(), last_error = NULL WHERE id = $1", [
      escalationId,
    ]);
    await recordAudit(
      { organizationId },
      {
        action: "send-escalation",
        subjectKind: "site",
        subjectId: claimed.siteId,
        values: { escalationId },
      },
    );
  });
  retryUnlessSettled(outcome, "the escalation");
}

/** Writes the letter once, or says that there is nothing to send. */
async function claim(
  id: string,
  publicUrl: string,
): Promise<{ to: string; mail: Mail; siteId: string } | null> {
  const found = await row<EscalationRow & { siteId: string }>(
    `SELECT CASE WHEN u.revoked_at IS NULL THEN u.email END AS email, u.language, u.name AS "recipientName", x.sent_at AS "sentAt", x.subject,
       x.body_text AS "bodyText", x.body_html AS "bodyHtml", o.name AS "organizationName", s.name AS "siteName", s.id AS "siteId"
     FROM escalations x JOIN users u ON u.id = x.recipient_id JOIN sites s ON s.id = x.site_id JOIN organizations o ON o.id = x.organization_id
     WHERE x.id = :id FOR UPDATE OF x`,
    { id },
  );
  if (!found?.email || found.sentAt !== null) return null;
  const { email: to, siteId } = found;
  if (found.subject !== null)
    return {
      to,
      siteId,
      mail: { subject: found.subject, text: found.bodyText ?? "", html: found.bodyHtml ?? "" },
    };
  const findings = await rows<EscalationFacts["findings"][number]>(
    `SELECT f.kind, coalesce(w.name, j.name, i.name) AS subject, f.due_on::text AS "dueOn", o.name AS "ownerName"
     FROM findings f LEFT JOIN workers w ON w.id = f.worker_id LEFT JOIN jobs j ON j.id = f.job_id
     LEFT JOIN instruments i ON i.id = f.instrument_id LEFT JOIN users o ON o.id = f.owner_id
     WHERE f.escalation_id = :id AND f.state <> 'closed' ORDER BY f.due_on, f.id`,
    { id },
  );
  if (findings.length === 0) return null;
  const locale = isLocale(found.language) ? found.language : "en";
  const mail = escalationMail(await createI18n(locale), locale, {
    ...found,
    findings,
    link: `${publicUrl}/findings`,
  });
  await execute(
    "UPDATE escalations SET subject = $2, body_text = $3, body_html = $4 WHERE id = $1",
    [id, mail.subject, mail.text, mail.html],
  );
  return { to, siteId, mail };
}
