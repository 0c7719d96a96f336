import { createI18n, isLocale } from "../../shared/i18n";
import { addDays } from "../../shared/time/zone";
import { loadActor } from "../auth/actor";
import { type DigestFacts, digestMail } from "../emails/digest";
import type { Mail } from "../emails/frame";
import { execute, inTransaction, row, rows } from "../lib/db";
import { AppError } from "../lib/errors";
import type { JobPayloads } from "../lib/jobs";
import { type Mailer, retryUnlessSettled } from "../lib/mailer";
import { type Actor, visible } from "../lib/policy";
import { Crew } from "../models/worker";
import { chargePolicy } from "../policies";
import { stillAsked } from "../queries/crew-orders";
import { crewSheet } from "../queries/crew-sheet";
import { nextShiftDate } from "../queries/next-shift";

interface DigestRow {
  email: string | null;
  language: string;
  userId: string;
  epoch: number;
  isStillChosen: boolean;
  date: string;
  subject: string | null;
  bodyText: string | null;
  bodyHtml: string | null;
  recipientName: string;
  organizationName: string;
  siteId: string;
  siteName: string;
}

/** What a mail is after an attempt; one refused for good is not tried again. */
const STATES = { sent: "sent", never: "refused", later: "waiting", unknown: "waiting" } as const;

/**
 * Sends one person's mail of a day. A second attempt says word for word what the first said, under the same Message-ID;
 * on a day on which none of the crews works there is no mail.
 *
 * @throws Error where the server did not take it for now: the queue tries again later.
 */
export async function sendDigest(
  { organizationId, digestId }: JobPayloads["send-digest"],
  mailer: Mailer,
  publicUrl: string,
): Promise<void> {
  const claimed = await inTransaction({ organizationId }, () => claim(digestId, publicUrl));
  if (!claimed) return;
  const outcome = await mailer.send({
    to: claimed.to,
    messageId: `<${digestId}@dinward>`,
    ...claimed.mail,
  });
  const state = STATES[outcome.kind];
  await inTransaction({ organizationId }, () =>
    execute(
      "UPDATE digests SET state = $2, sent_at = CASE WHEN $2 = 'sent' THEN now() END, last_error = $3 WHERE id = $1 AND state = 'waiting'",
      [digestId, state, outcome.kind === "sent" ? null : outcome.error],
    ),
  );
  retryUnlessSettled(outcome, "the digest");
}

async function claim(id: string, publicUrl: string): Promise<{ to: string; mail: Mail } | null> {
  const found = await row<DigestRow>(
    `SELECT CASE WHEN u.revoked_at IS NULL THEN u.email END AS email, u.language, u.name AS "recipientName", u.id AS "userId", u.session_epoch AS epoch,
       c.hour IS NOT NULL AS "isStillChosen", d.date::text AS date, d.subject, d.body_text AS "bodyText", d.body_html AS "bodyHtml",
       o.name AS "organizationName", s.id AS "siteId", s.name AS "siteName"
     FROM digests d JOIN users u ON u.id = d.user_id JOIN digest_choices c ON c.user_id = d.user_id JOIN sites s ON s.id = d.site_id
     JOIN organizations o ON o.id = d.organization_id WHERE d.id = :id AND d.state = 'waiting' FOR UPDATE OF d`,
    { id },
  );
  if (!found) return null;
  const { email: to, subject, bodyText, bodyHtml } = found;
  const crews = to !== null && found.isStillChosen ? await crewsOf(found) : [];
  if (to === null || crews.length === 0) {
    await execute("UPDATE digests SET state = 'nothing' WHERE id = $1", [id]);
    return null;
  }
  if (subject !== null)
    return { to, mail: { subject, text: bodyText ?? "", html: bodyHtml ?? "" } };
  const locale = isLocale(found.language) ? found.language : "en";
  const mail = digestMail(await createI18n(locale), locale, {
    ...found,
    crews,
    link: `${publicUrl}/crew-sheet`,
    accountLink: `${publicUrl}/account#digest`,
  });
  await execute("UPDATE digests SET subject = $2, body_text = $3, body_html = $4 WHERE id = $1", [
    id,
    mail.subject,
    mail.text,
    mail.html,
  ]);
  return { to, mail };
}

/** The crews in this person's charge that work on the date, as their sheets stand. */
async function crewsOf({
  userId,
  epoch,
  siteId,
  date,
}: DigestRow): Promise<DigestFacts["crews"][number][]> {
  const actor = await loadActor(userId, epoch).catch((error: unknown): Actor | null => {
    if (error instanceof AppError) return null;
    throw error;
  });
  if (!actor) return [];
  const ids = await rows<{ id: string }>(
    `SELECT c.id FROM crews c WHERE c.site_id = :siteId AND NOT c.is_archived AND ${visible(chargePolicy, actor, "c")} ORDER BY c.usual_start, c.name, c.id`,
    { siteId },
  );
  const crews = await Crew.findAll({ where: { id: ids.map(({ id }) => id) } });
  const facts: DigestFacts["crews"][number][] = [];
  for (const { id } of ids) {
    const crew = crews.find((one) => one.id === id);
    if (!crew || (await nextShiftDate(id, addDays(date, -1))) !== date) continue;
    const { expected, handOver } = await crewSheet(actor, crew);
    const isHere = ({ isAbsent, lentTo }: (typeof expected.rows)[number]) => !isAbsent && !lentTo;
    facts.push({
      name: crew.name,
      usualStart: crew.usualStart.slice(0, 5),
      expectedDate: expected.date,
      expected: expected.rows.filter(isHere).length,
      absentNames: expected.rows
        .filter(({ isAbsent }) => isAbsent)
        .map(({ worker }) => worker.name),
      lent: expected.rows.flatMap(({ worker, lentTo }) =>
        lentTo ? [{ name: worker.name, crewName: lentTo.crewName }] : [],
      ),
      orders: expected.rows
        .filter(isHere)
        .flatMap((one) =>
          stillAsked(one).map(({ kind, facts }) => ({ name: one.worker.name, kind, facts })),
        ),
      handOverBy: handOver?.byName ?? null,
    });
  }
  return facts;
}
