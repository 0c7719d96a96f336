import { randomUUID } from "node:crypto";
import { queueNotice } from "../../server/commands/schedule-notices";
import type { OpenedFinding } from "../../server/commands/update-findings";
import { noticeMail } from "../../server/jobs/send-notice";
import { execute, rows } from "../../server/lib/db";
import { groupBy } from "../../server/lib/group-by";
import { isNotified } from "../../shared/findings/notified";
import { SITES, type SiteKey } from "../demo/programme";
import type { Demo } from "./programme";
import { known } from "./programme";

const MINUTE_MS = 60_000;

/** A notice that never arrived, and what left two days late: to whom, and about what. */
const TROUBLED = {
  failed: { sub: "s.okonedo", kind: "peak-or-ceiling", error: "550 5.1.1 no mailbox of that name" },
  late: {
    sub: "p.lanyon",
    kind: "over-limit-at-ear",
    byMin: 2 * 24 * 60,
    olderThanMin: 7 * 24 * 60,
  },
} as const;

/**
 * What people were told in the past. The application's own command looks no further back than a month, and leaves
 * sending to its queue; this lays down the same rows as they stand once they are sent.
 */
export async function tellInThePast(
  demo: Demo,
  opened: readonly OpenedFinding[],
  at: Date,
  publicUrl: string,
): Promise<void> {
  const news = opened.filter(isNotified);
  for (const [key, ofEntry] of groupBy(news, ({ siteId, date }) => `${siteId} ${date}`)) {
    const siteId = key.split(" ")[0]!;
    const site = [...demo.sites].find(([, { id }]) => id === siteId)![0];
    await demo.at(at, () => layDown(demo, site, siteId, ofEntry, at));
  }
  await markSent(demo, at, publicUrl);
}

async function layDown(
  demo: Demo,
  site: SiteKey,
  siteId: string,
  news: readonly OpenedFinding[],
  entered: Date,
): Promise<void> {
  const items = JSON.stringify(
    news.map(({ id, workerId, date, resultId }) => ({ findingId: id, workerId, date, resultId })),
  );
  const told = await rows<{
    recipientId: string;
    audience: string;
    findingId: string;
    workerId: string;
    date: string;
    resultId: string;
  }>(
    `WITH item AS (SELECT * FROM jsonb_to_recordset(CAST(:items AS jsonb)) AS x("findingId" uuid, "workerId" uuid, date date, "resultId" uuid)),
       told AS (
         SELECT i."workerId", i.date, s.user_id AS id, 'supervisor' AS audience FROM item i
           JOIN days d ON d.worker_id = i."workerId" AND d.date = i.date JOIN crew_supervisors s ON s.crew_id = d.crew_id AND s.valid @> i.date
         UNION SELECT i."workerId", i.date, u.id, 'worker' FROM item i JOIN users u ON u.worker_id = i."workerId"
         UNION SELECT i."workerId", i.date, CAST(:officerId AS uuid), 'officer' FROM item i)
     SELECT t.id AS "recipientId", t.audience, i."findingId", i."workerId", i.date::text AS date, i."resultId"
     FROM item i JOIN told t ON t."workerId" = i."workerId" AND t.date = i.date JOIN users u ON u.id = t.id AND u.email IS NOT NULL ORDER BY u.name, i."findingId"`,
    { items, officerId: demo.officer(site).userId },
  );
  const entryId = randomUUID();
  const notBefore = new Date(
    entered.getTime() + SITES[site].noticeDelayMin * MINUTE_MS,
  ).toISOString();
  for (const [key, ofNotice] of groupBy(
    told,
    ({ recipientId, audience }) => `${recipientId} ${audience}`,
  )) {
    const [recipientId, audience] = key.split(" ");
    const id = randomUUID();
    await execute(
      `INSERT INTO notices (id, organization_id, site_id, recipient_id, entry_id, audience, state, not_before, message_id) VALUES ($1, $2, $3, $4, $5, $6, 'waiting', $7, $8)`,
      [
        id,
        demo.organizationId,
        siteId,
        recipientId,
        entryId,
        audience,
        notBefore,
        `<${id}@dinward>`,
      ],
    );
    await execute(
      `INSERT INTO notice_items (organization_id, notice_id, finding_id, worker_id, date, result_id)
       SELECT $1, $2, x."findingId", x."workerId", x.date, x."resultId" FROM jsonb_to_recordset($3::jsonb) AS x("findingId" uuid, "workerId" uuid, date date, "resultId" uuid)`,
      [demo.organizationId, id, JSON.stringify(ofNotice)],
    );
  }
}

/** Notices whose time had come by then leave, in the words they had that day; their jobs are done. */
export async function markSent(demo: Demo, by: Date, publicUrl: string): Promise<void> {
  const { now } = demo;
  await demo.at(by, async () => {
    const due = await rows<{
      id: string;
      createdAt: Date;
      delayMin: number;
      recipientId: string;
      kinds: string[];
    }>(
      `SELECT n.id, n.created_at AS "createdAt", s.notice_delay_min AS "delayMin", n.recipient_id AS "recipientId", array_agg(f.kind) AS kinds
       FROM notices n JOIN sites s ON s.id = n.site_id JOIN notice_items i ON i.notice_id = n.id JOIN findings f ON f.id = i.finding_id
       WHERE n.state = 'waiting' AND n.created_at + make_interval(mins => s.notice_delay_min) < CAST(:by AS timestamptz) GROUP BY n.id, s.id`,
      { by: by.toISOString() },
    );
    for (const { id, createdAt, delayMin, recipientId, kinds } of due) {
      const isFor = (trouble: { sub: string; kind: string }) =>
        known(demo.actors, trouble.sub).userId === recipientId && kinds.includes(trouble.kind);
      const isFailed = isFor(TROUBLED.failed);
      const notBefore = new Date(createdAt.getTime() + delayMin * MINUTE_MS);
      const isLate =
        isFor(TROUBLED.late) &&
        now.getTime() - notBefore.getTime() > TROUBLED.late.olderThanMin * MINUTE_MS;
      const attempted = new Date(
        notBefore.getTime() + (isLate ? TROUBLED.late.byMin * MINUTE_MS : 2_000),
      );
      await storeAttempt(id, {
        notBefore,
        attempted,
        error: isFailed ? TROUBLED.failed.error : null,
        publicUrl,
      });
    }
  });
}

/** How a notice stands after its one attempt, in the words it has now; its job is done. */
export async function storeAttempt(
  id: string,
  {
    notBefore,
    attempted,
    error,
    publicUrl,
  }: { notBefore: Date; attempted: Date; error: string | null; publicUrl: string },
): Promise<void> {
  const mail = await noticeMail(id, publicUrl);
  await execute(
    `UPDATE notices SET state = $2, not_before = $3, attempted_at = $4, sent_at = CASE WHEN $2 = 'sent' THEN $4::timestamptz END, tries = 1,
       last_error = $5, subject = $6, body_text = $7, body_html = $8, revision = revision + 2 WHERE id = $1`,
    [
      id,
      error === null ? "sent" : "failed",
      notBefore.toISOString(),
      attempted.toISOString(),
      error,
      mail.subject,
      mail.text,
      mail.html,
    ],
  );
  await rows("SELECT graphile_worker.remove_job(:key) IS NULL AS gone", { key: `notice:${id}` });
}

/** An attempt of which nobody knows how it ended, and its one repetition. */
const CUT_OFF = "connection lost after the message was handed over";
const ATTEMPTS = 2;
/** What a mail server said of a mail that it had taken. */
const CAME_BACK = { status: "5.1.1", said: "smtp; 550 5.1.1 no mailbox of that name" };
const DAY_MS = 86_400_000;
/** As long as the officer's page shows what did not arrive. */
const TROUBLE_SHOWN_DAYS = 30;

/**
 * However late in the day the demo is filled, each site has an entry of a minute ago, whose people are still to be told,
 * one before it of which a notice may not have arrived, and one of which a notice came back.
 */
export async function leaveSomeToTell(demo: Demo): Promise<void> {
  const { now } = demo;
  for (const site of Object.keys(SITES) as SiteKey[]) {
    const entered = new Date(now.getTime() - MINUTE_MS);
    const notBefore = new Date(entered.getTime() + SITES[site].noticeDelayMin * MINUTE_MS);
    await demo.at(now, async () => {
      const found = await rows<{
        entryId: string;
        ids: string[];
        supervisorNoticeId: string | null;
        workerNoticeId: string | null;
      }>(
        `SELECT n.entry_id AS "entryId", array_agg(n.id) AS ids, (array_agg(n.id ORDER BY n.id) FILTER (WHERE n.audience = 'supervisor'))[1] AS "supervisorNoticeId",
           (array_agg(n.id ORDER BY n.id) FILTER (WHERE n.audience = 'worker'))[1] AS "workerNoticeId"
         FROM notices n WHERE n.site_id = :siteId AND n.state IN ('waiting', 'sent') AND n.created_at > CAST(:since AS timestamptz)
           AND EXISTS (SELECT 1 FROM notice_items i JOIN findings f ON f.id = i.finding_id WHERE i.notice_id = n.id AND f.state <> 'closed')
         GROUP BY n.entry_id ORDER BY max(n.created_at) DESC, n.entry_id LIMIT 5`,
        {
          siteId: known(demo.sites, site).id,
          since: new Date(now.getTime() - TROUBLE_SHOWN_DAYS * DAY_MS).toISOString(),
        },
      );
      const [latest, ...before] = found;
      for (const id of latest?.ids ?? []) {
        await execute(
          `UPDATE notices SET state = 'waiting', created_at = $2, not_before = $3, attempted_at = NULL, sent_at = NULL, tries = 0,
             last_error = NULL, subject = NULL, body_text = NULL, body_html = NULL, revision = 1 WHERE id = $1`,
          [id, entered.toISOString(), notBefore.toISOString()],
        );
        await queueNotice(demo.organizationId, id, notBefore);
      }
      const unsure = before.find(({ supervisorNoticeId }) => supervisorNoticeId !== null);
      await execute(
        `UPDATE notices SET state = 'possibly-sent', sent_at = NULL, tries = $2, unknown_outcomes = $2, last_error = $3 WHERE id = $1`,
        [unsure?.supervisorNoticeId ?? null, ATTEMPTS, CUT_OFF],
      );
      const returned = before.find(({ workerNoticeId }) => workerNoticeId !== null);
      await execute(
        `WITH returned AS (UPDATE notices SET state = 'bounced', last_error = $2, revision = revision + 1 WHERE id = $1 AND state = 'sent' RETURNING id, organization_id)
         INSERT INTO mail_events (organization_id, notice_id, event_id, kind, way, status, said, received_at)
         SELECT organization_id, id, 'report ' || id, 'bounced', 'report', $2, $3, $4 FROM returned`,
        [returned?.workerNoticeId ?? null, CAME_BACK.status, CAME_BACK.said, now.toISOString()],
      );
    });
  }
}
