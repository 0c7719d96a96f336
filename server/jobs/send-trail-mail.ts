import { createI18n, isLocale } from "../../shared/i18n";
import type { Mail } from "../emails/frame";
import { keeperGoneMail, trailHeadMail } from "../emails/trail-head";
import { recordAudit } from "../lib/audit";
import { execute, inTransaction, row } from "../lib/db";
import type { JobPayloads } from "../lib/jobs";
import { type Mailer, retryUnlessSettled } from "../lib/mailer";
import { trailHead } from "../queries/trail-check";

/**
 * Takes the trail's head to whoever keeps it outside. A second attempt says word for word what the first said, under the same
 * Message-ID.
 *
 * @throws Error where the server did not take it for now: the queue tries again later.
 */
export async function sendTrailMail(
  { organizationId, mailId }: JobPayloads["send-trail-mail"],
  mailer: Mailer,
  publicUrl: string,
): Promise<void> {
  const claimed = await inTransaction({ organizationId }, () =>
    claim(organizationId, mailId, publicUrl),
  );
  if (!claimed) return;
  const outcome = await mailer.send({
    to: claimed.to,
    messageId: `<${mailId}@dinward>`,
    ...claimed.mail,
  });
  await inTransaction({ organizationId }, async () => {
    if (outcome.kind !== "sent") {
      await execute(
        `UPDATE trail_mails SET last_error = $2 ${outcome.kind === "never" ? ", state = 'refused'" : ""} WHERE id = $1`,
        [mailId, outcome.error],
      );
      return;
    }
    await execute(
      // It may have come back already.
      "UPDATE trail_mails SET state = 'sent', sent_at = now(), last_error = NULL WHERE id = $1 AND state = 'waiting'",
      [mailId],
    );
    if (claimed.seal)
      await recordAudit(
        { organizationId },
        {
          action: "send-trail-head",
          subjectKind: "organization",
          subjectId: organizationId,
          values: { ...claimed.seal, email: claimed.to },
        },
      );
  });
  retryUnlessSettled(outcome, "the trail's head");
}

interface MailRow {
  kind: "head" | "no-longer";
  name: string;
  email: string;
  language: string;
  timeZone: string;
  sealNumber: number | null;
  sealHash: string | null;
  subject: string | null;
  bodyText: string | null;
  bodyHtml: string | null;
  organizationName: string;
}

async function claim(
  organizationId: string,
  id: string,
  publicUrl: string,
): Promise<{ to: string; mail: Mail; seal: { number: number; hash: string } | null } | null> {
  const found = await row<MailRow>(
    `SELECT m.kind, m.name, m.email, m.language, m.time_zone AS "timeZone", m.seal_number::int AS "sealNumber", encode(m.seal_sha256, 'hex') AS "sealHash",
       m.subject, m.body_text AS "bodyText", m.body_html AS "bodyHtml", o.name AS "organizationName"
     FROM trail_mails m JOIN organizations o ON o.id = m.organization_id WHERE m.id = :id AND m.state = 'waiting' FOR UPDATE OF m`,
    { id },
  );
  if (!found) return null;
  const { email: to, sealNumber, sealHash, subject, bodyText, bodyHtml } = found;
  if (subject !== null)
    return {
      to,
      mail: { subject, text: bodyText ?? "", html: bodyHtml ?? "" },
      seal:
        sealNumber !== null && sealHash !== null ? { number: sealNumber, hash: sealHash } : null,
    };
  const locale = isLocale(found.language) ? found.language : "en";
  const i18n = await createI18n(locale);
  const head = found.kind === "head" ? await trailHead(organizationId) : null;
  if (found.kind === "head" && !head) return null;
  const facts = { ...found, link: publicUrl };
  const mail = head
    ? trailHeadMail(i18n, locale, { ...facts, head })
    : keeperGoneMail(i18n, locale, facts);
  await execute(
    `UPDATE trail_mails SET subject = $2, body_text = $3, body_html = $4, seal_number = $5, seal_sha256 = decode($6, 'hex'), sealed_at = $7 WHERE id = $1`,
    [
      id,
      mail.subject,
      mail.text,
      mail.html,
      head?.number ?? null,
      head?.hash ?? null,
      head?.sealedAt ?? null,
    ],
  );
  return { to, mail, seal: head && { number: head.number, hash: head.hash } };
}
