import { createI18n, isLocale } from "../../shared/i18n";
import { HIDDEN_SECRET, LETTER_PATH, linkLetter } from "../commands/link-letter";
import type { Mail } from "../emails/frame";
import { type NoticeFacts, type NoticeItem, overLimitMail } from "../emails/over-limit";
import { resultsMail } from "../emails/results-letter";
import { recordAudit } from "../lib/audit";
import { execute, inTransaction, row, rows } from "../lib/db";
import type { JobPayloads } from "../lib/jobs";
import type { Mailer } from "../lib/mailer";

interface Claimed {
  mail: Mail;
  to: string;
  messageId: string;
  isRetryOfUnknown: boolean;
}

interface NoticeRow {
  state: string;
  isDue: boolean;
  kind: "findings" | "results";
  unknownOutcomes: number;
  messageId: string;
  email: string | null;
  subject: string | null;
  bodyText: string | null;
  bodyHtml: string | null;
}

/**
 * Sends one notice of the outbox. It is marked as being sent before the mail server hears of it, so that after a crash
 * nobody takes an unknown outcome for a failure: that is retried once under the same Message-ID, and then rests.
 *
 * @throws Error where the server refused for now: the queue tries again later.
 */
export async function sendNotice(
  { organizationId, noticeId }: JobPayloads["send-notice"],
  mailer: Mailer,
  publicUrl: string,
): Promise<void> {
  const claimed = await inTransaction({ organizationId }, () => claim(noticeId, publicUrl));
  if (!claimed) return;
  const outcome = await mailer.send({
    to: claimed.to,
    messageId: claimed.messageId,
    ...claimed.mail,
  });
  await inTransaction({ organizationId }, async () => {
    if (outcome.kind === "sent") {
      await execute(
        // A report that it came back may be here before the server's own answer.
        "UPDATE notices SET state = 'sent', sent_at = now(), last_error = NULL, revision = revision + 1 WHERE id = $1 AND state = 'sending'",
        [noticeId],
      );
      await recordAudit(
        { organizationId },
        {
          action: "send-notice",
          subjectKind: "notice",
          subjectId: noticeId,
          values: { messageId: claimed.messageId },
        },
      );
      return;
    }
    const state = { later: "waiting", never: "failed", unknown: "possibly-sent" }[outcome.kind];
    await execute(
      `UPDATE notices SET state = $2, last_error = $3, unknown_outcomes = unknown_outcomes + $4, revision = revision + 1,
         not_before = CASE WHEN $2 = 'waiting' THEN now() + least(power(2, tries), 60) * interval '1 minute' ELSE not_before END WHERE id = $1`,
      [noticeId, state, outcome.error, outcome.kind === "unknown" ? 1 : 0],
    );
  });
  if (outcome.kind === "later" || (outcome.kind === "unknown" && !claimed.isRetryOfUnknown)) {
    throw new Error(`the mail server did not take the notice: ${outcome.error}`);
  }
}

/** Takes the notice for this attempt, or says that there is nothing to send. */
async function claim(noticeId: string, publicUrl: string): Promise<Claimed | null> {
  const notice = await row<NoticeRow>(
    `SELECT n.state, n.kind, n.not_before <= now() + interval '1 second' OR n.last_error IS NOT NULL AS "isDue", n.unknown_outcomes AS "unknownOutcomes", n.message_id AS "messageId",
       CASE WHEN u.revoked_at IS NULL THEN u.email END AS email, n.subject, n.body_text AS "bodyText", n.body_html AS "bodyHtml"
     FROM notices n JOIN users u ON u.id = n.recipient_id WHERE n.id = :noticeId FOR UPDATE OF n`,
    { noticeId },
  );
  if (!notice || !["waiting", "sending", "possibly-sent"].includes(notice.state)) return null;
  if (notice.state === "waiting" && !notice.isDue) return null;
  if (!notice.email) {
    await execute(
      "UPDATE notices SET state = 'failed', last_error = 'no address', revision = revision + 1 WHERE id = $1",
      [noticeId],
    );
    return null;
  }
  // Found as "sending": an attempt was cut off, and whether the server took it nobody knows.
  const unknown = notice.unknownOutcomes + (notice.state === "sending" ? 1 : 0);
  if (unknown > 1) {
    await execute(
      "UPDATE notices SET state = 'possibly-sent', unknown_outcomes = $2 WHERE id = $1",
      [noticeId, unknown],
    );
    return null;
  }
  // A second attempt says word for word what the first said.
  const mail =
    notice.subject !== null
      ? { subject: notice.subject, text: notice.bodyText ?? "", html: notice.bodyHtml ?? "" }
      : await noticeMail(noticeId, publicUrl);
  await execute(
    `UPDATE notices SET state = 'sending', tries = tries + 1, attempted_at = now(), unknown_outcomes = $2, subject = $3, body_text = $4, body_html = $5, revision = revision + 1 WHERE id = $1`,
    [noticeId, unknown, mail.subject, mail.text, mail.html],
  );
  return {
    mail: notice.kind === "results" ? await linkLetter(noticeId, mail) : mail,
    to: notice.email,
    messageId: notice.messageId,
    isRetryOfUnknown: unknown > 0,
  };
}

interface HeadRow {
  kind: "findings" | "results";
  audience: NoticeFacts["audience"];
  recipientName: string;
  language: string;
  organizationName: string;
  siteName: string;
  replacesMailOf: string | null;
}

/** The notice as it reads now, in its reader's language. */
export async function noticeMail(noticeId: string, publicUrl: string): Promise<Mail> {
  const head = await row<HeadRow>(
    `SELECT n.kind, n.audience, u.name AS "recipientName", u.language, o.name AS "organizationName", s.name AS "siteName",
       (coalesce(earlier.sent_at, earlier.attempted_at, earlier.not_before) AT TIME ZONE s.time_zone)::date::text AS "replacesMailOf"
     FROM notices n LEFT JOIN notices earlier ON earlier.id = n.replaces_id JOIN users u ON u.id = n.recipient_id JOIN organizations o ON o.id = n.organization_id JOIN sites s ON s.id = n.site_id WHERE n.id = :noticeId`,
    { noticeId },
  );
  if (!head) throw new Error("the notice is gone");
  if (head.kind === "results") return letterMail(noticeId, publicUrl, head);
  // A finding's facts are those of its latest day: what the item's own day came to takes their place.
  const items = await rows<NoticeItem>(
    `SELECT w.name AS "workerName", w.employee_number AS "employeeNumber", i.date::text AS date, coalesce(r.at_ear_counted_db, r.at_ear_db) AS "atEarDb", r.outside_db AS "outsideDb",
       jsonb_agg(jsonb_build_object('kind', f.kind, 'facts', f.facts || coalesce(own.figures, '{}'),
         'closedOn', CASE WHEN f.state = 'closed' THEN f.closed_on END,
         'isStillOver', EXISTS (SELECT 1 FROM finding_evidence e WHERE e.finding_id = f.id AND e.worker_id = i.worker_id AND e.date = i.date))
         ORDER BY f.last_date DESC, f.id) AS findings
     FROM notice_items i JOIN findings f ON f.id = i.finding_id JOIN workers w ON w.id = i.worker_id JOIN day_results r ON r.id = i.result_id
     LEFT JOIN LATERAL (SELECT jsonb_build_object('levelDb', c->'levelDb', 'dosePct', c->'dosePct') AS figures FROM jsonb_path_query(r.criteria, '$.governing[*]') c
       WHERE concat(c->>'ruleSetKey', ':', c->>'criterionId') = f.criterion LIMIT 1) own ON TRUE
     WHERE i.notice_id = :noticeId GROUP BY w.name, w.employee_number, i.date, r.at_ear_counted_db, r.at_ear_db, r.outside_db ORDER BY w.name, i.date`,
    { noticeId },
  );
  const locale = isLocale(head.language) ? head.language : "en";
  const i18n = await createI18n(locale);
  return overLimitMail(i18n, locale, {
    ...head,
    items,
    link: `${publicUrl}/${head.audience === "worker" ? "" : head.audience === "supervisor" ? "crew-sheet" : "findings"}`,
  });
}

/** A letter goes as it was written; the link stands in what is kept of the mail without its secret. */
async function letterMail(
  noticeId: string,
  publicUrl: string,
  { organizationName, siteName }: HeadRow,
): Promise<Mail> {
  const letter = await row<{ language: string; subject: string; text: string }>(
    "SELECT language, subject, body_text AS text FROM result_letters WHERE notice_id = :noticeId",
    { noticeId },
  );
  if (!letter) throw new Error("the letter is gone");
  const locale = isLocale(letter.language) ? letter.language : "en";
  return resultsMail(await createI18n(locale), locale, letter, {
    link: `${publicUrl}${LETTER_PATH}${HIDDEN_SECRET}`,
    from: `${organizationName}, ${siteName}`,
  });
}
