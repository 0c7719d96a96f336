import { acknowledgeByLink, acknowledgeOnPaper } from "../../server/commands/acknowledge-letter";
import { LETTER_PATH, linkLetter } from "../../server/commands/link-letter";
import { writeResultLetters } from "../../server/commands/write-result-letters";
import { noticeMail } from "../../server/jobs/send-notice";
import { rows } from "../../server/lib/db";
import { findLetter } from "../../server/queries/letters";
import { addDays, localDate } from "../../shared/time/zone";
import type { SiteKey } from "../demo/programme";
import { LETTERS_DAYS_AGO, READ_AFTER_DAYS, SIGNED_AFTER_DAYS, UNREAD } from "../demo/records";
import { storeAttempt } from "./notices";
import { type Demo, known } from "./programme";

/** Letters of results as they went out week by week, acknowledged by their links or on paper; the latest are to be written. */
export async function layOutLetters(demo: Demo, publicUrl: string): Promise<void> {
  const calendar = demo.calendar("ostmere");
  for (const daysAgo of LETTERS_DAYS_AGO) {
    const at = calendar.instant(calendar.daysAgo(daysAgo), "09:00");
    await demo.at(at, async () => {
      await writeResultLetters(demo.organizationId, at);
      await sendLetters(at, publicUrl);
    });
  }
  for (const site of demo.sites.keys()) {
    const { mailed, onPaper } = await readLetters(demo, site);
    for (const noticeId of mailed) await acknowledgeMailed(demo, noticeId, publicUrl);
    for (const id of onPaper) await signOnPaper(demo, site, id);
  }
}

/** Those with a mail address leave at once; their jobs are done. */
async function sendLetters(at: Date, publicUrl: string): Promise<void> {
  const written = await rows<{ id: string }>(
    "SELECT id FROM notices WHERE kind = 'results' AND state = 'waiting'",
  );
  for (const { id } of written)
    await storeAttempt(id, { notBefore: at, attempted: at, error: null, publicUrl });
}

/** Letters that were read by now, the oldest first: mailed ones by their notice, and those on paper. */
async function readLetters(demo: Demo, site: SiteKey) {
  const calendar = demo.calendar(site);
  const found = await demo.at(demo.now, () =>
    rows<{ id: string; noticeId: string | null }>(
      `SELECT l.id, l.notice_id AS "noticeId" FROM result_letters l JOIN workers w ON w.id = l.worker_id
       WHERE l.site_id = :siteId AND l.written_at < CAST(:before AS timestamptz) AND w.employee_number NOT IN (:unread)
       ORDER BY l.written_at, w.employee_number, l.due_on`,
      {
        siteId: known(demo.sites, site).id,
        before: calendar.instant(calendar.daysAgo(READ_AFTER_DAYS), "00:10").toISOString(),
        unread: [...UNREAD],
      },
    ),
  );
  return {
    mailed: found.flatMap(({ noticeId }) => noticeId ?? []),
    onPaper: found.filter(({ noticeId }) => noticeId === null).map(({ id }) => id),
  };
}

async function acknowledgeMailed(demo: Demo, noticeId: string, publicUrl: string): Promise<void> {
  const { text } = await demo.at(demo.now, async () =>
    linkLetter(noticeId, await noticeMail(noticeId, publicUrl)),
  );
  const secret = new RegExp(`${LETTER_PATH}([\\w-]+)`).exec(text)?.[1];
  if (!secret) throw new Error("a letter was mailed without its link");
  await acknowledgeByLink(secret, {});
}

async function signOnPaper(demo: Demo, site: SiteKey, id: string): Promise<void> {
  const officer = demo.officer(site);
  const letter = await demo.at(demo.now, () => findLetter(officer, id));
  const signedOn = addDays(localDate(letter.writtenAt, letter.timeZone), SIGNED_AFTER_DAYS);
  await demo.at(demo.calendar(site).instant(signedOn, "15:30"), () =>
    acknowledgeOnPaper(officer, letter, signedOn),
  );
}
