import { randomUUID } from "node:crypto";
import { isNotified, NEWS_FOR_DAYS } from "../../shared/findings/notified";
import { addDays } from "../../shared/time/zone";
import { todayAt } from "../lib/calendar";
import { execute, row, rows } from "../lib/db";
import { inForce } from "../lib/grants";
import { addJob } from "../lib/jobs";
import type { Actor } from "../lib/policy";
import type { Recomputation } from "./recompute-days";
import type { OpenedFinding } from "./update-findings";

interface Told {
  recipientId: string;
  audience: "officer" | "supervisor" | "worker";
}

interface Scheduling {
  organizationId: string;
  /** Who saved; null for work of the program's own. */
  author: Actor | null;
  entryId: string;
  siteId: string;
  recomputed: Recomputation;
}

/**
 * Writes into the outbox who has to be told, in the transaction of the findings themselves, with the time before which
 * nothing leaves. One notice per person and entry. What was told already and is now another result is told anew, as
 * replacing the earlier; what was not told yet and is gone is withdrawn.
 */
export async function scheduleNotices({
  organizationId,
  author,
  entryId,
  siteId,
  recomputed,
}: Scheduling): Promise<void> {
  const site = await row<{ delayMin: number; timeZone: string }>(
    `SELECT notice_delay_min AS "delayMin", time_zone AS "timeZone" FROM sites WHERE id = :siteId`,
    { siteId },
  );
  if (!site) return;
  const notBefore = new Date(Date.now() + site.delayMin * 60_000);
  const oldest = addDays(todayAt(site.timeZone), -NEWS_FOR_DAYS);
  const days = changedDays(recomputed);
  const earlier = await statesOfNotices(days);
  if (earlier.some((state) => unsent.has(state))) await withdrawUnsent(days);
  if (earlier.some((state) => told.has(state)))
    await replaceSent({ organizationId, entryId, notBefore, days });
  const news = await untoldFindings(recomputed, oldest);
  if (news.length === 0) return;

  const items: {
    recipientId: string;
    audience: Told["audience"];
    findingId: string;
    workerId: string;
    date: string;
    resultId: string;
  }[] = [];
  const toldOf = await audiences(news, siteId, author);
  for (const { id: findingId, workerId, date, resultId } of news) {
    for (const told of toldOf.get(`${workerId} ${date}`) ?? [])
      items.push({ ...told, findingId, workerId, date, resultId });
  }
  await writeNotices(organizationId, siteId, entryId, notBefore, items, new Map());
}

type News = Omit<OpenedFinding, "siteId">;

/**
 * Findings of which nobody was told yet and that a fresh one of these days shows, each with the latest such day. One that
 * began longer ago is news as well: only its first days are not.
 */
async function untoldFindings({ days }: Recomputation, oldest: string): Promise<News[]> {
  const fresh = days.filter(({ date, resultId }) => date >= oldest && resultId !== null);
  if (fresh.length === 0) return [];
  const found = await rows<News>(
    `SELECT DISTINCT ON (f.id) f.id, f.kind, f.criterion, e.worker_id AS "workerId", e.date::text AS date, e.result_id AS "resultId"
     FROM jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date)
     JOIN finding_evidence e ON e.worker_id = x."workerId" AND e.date = x.date JOIN findings f ON f.id = e.finding_id
     WHERE f.state <> 'closed' AND NOT EXISTS (SELECT 1 FROM notice_items i WHERE i.finding_id = f.id)
     ORDER BY f.id, e.date DESC, e.worker_id`,
    [JSON.stringify(fresh.map(({ workerId, date }) => ({ workerId, date })))],
  );
  return found.filter(isNotified);
}

async function audiences(
  news: readonly { workerId: string; date: string }[],
  siteId: string,
  author: Actor | null,
): Promise<Map<string, Told[]>> {
  const people = await rows<Told & { workerId: string; date: string }>(
    `WITH day AS (SELECT DISTINCT x."workerId" AS worker_id, x.date FROM jsonb_to_recordset(CAST(:days AS jsonb)) AS x("workerId" uuid, date date))
     SELECT d.worker_id AS "workerId", d.date::text AS date, u.id AS "recipientId", 'supervisor' AS audience
       FROM day d JOIN days h ON h.worker_id = d.worker_id AND h.date = d.date
       JOIN crew_supervisors s ON s.crew_id = h.crew_id AND s.valid @> d.date
       JOIN users u ON u.id = s.user_id AND u.revoked_at IS NULL AND u.email IS NOT NULL
     UNION
     SELECT d.worker_id, d.date::text, u.id, 'worker' FROM day d
       JOIN users u ON u.worker_id = d.worker_id AND u.revoked_at IS NULL AND u.email IS NOT NULL
       AND NOT EXISTS (SELECT 1 FROM mail_choices c WHERE c.user_id = u.id AND 'own-limit' = ANY (c.off))
     UNION
     SELECT d.worker_id, d.date::text, u.id, 'officer' FROM day d
       JOIN role_grants g ON g.role = 'officer' AND ${inForce("g")} AND (g.site_id IS NULL OR g.site_id = :siteId)
       JOIN users u ON u.id = g.user_id AND u.revoked_at IS NULL AND u.email IS NOT NULL AND (CAST(:authorId AS uuid) IS NULL OR u.id = :authorId)`,
    {
      days: JSON.stringify(news.map(({ workerId, date }) => ({ workerId, date }))),
      siteId,
      authorId: author?.email && author.isAt(siteId, "officer") ? author.userId : null,
    },
  );
  const byDay = new Map<string, Told[]>();
  for (const { workerId, date, recipientId, audience } of people) {
    const key = `${workerId} ${date}`;
    byDay.set(key, [...(byDay.get(key) ?? []), { recipientId, audience }]);
  }
  return byDay;
}

type Item = Told & { findingId: string; workerId: string; date: string; resultId: string };

async function writeNotices(
  organizationId: string,
  siteId: string,
  entryId: string,
  notBefore: Date,
  items: readonly Item[],
  replaces: ReadonlyMap<string, string>,
): Promise<void> {
  const keyOf = ({ recipientId, audience }: Told) => `${recipientId} ${audience}`;
  const notices = [...new Map(items.map((item) => [keyOf(item), item])).values()].map(
    ({ recipientId, audience }) => {
      const id = randomUUID();
      return {
        id,
        recipientId,
        audience,
        messageId: `<${id}@dinward>`,
        replacesId: replaces.get(keyOf({ recipientId, audience })) ?? null,
      };
    },
  );
  await execute(
    `INSERT INTO notices (id, organization_id, site_id, recipient_id, entry_id, audience, state, not_before, message_id, replaces_id)
     SELECT x.id, $1, $2, x."recipientId", $3, x.audience, 'waiting', $4, x."messageId", x."replacesId"
     FROM jsonb_to_recordset($5::jsonb) AS x(id uuid, "recipientId" uuid, audience text, "messageId" text, "replacesId" uuid)
     ON CONFLICT (entry_id, recipient_id, audience) DO NOTHING`,
    [organizationId, siteId, entryId, notBefore, JSON.stringify(notices)],
  );
  // A person who is told of a correction by this entry hears in the same mail what is new.
  const ofEntry = await rows<Told & { id: string }>(
    `SELECT id, recipient_id AS "recipientId", audience FROM notices WHERE entry_id = :entryId`,
    { entryId },
  );
  const noticeOf = new Map(ofEntry.map((notice) => [keyOf(notice), notice.id]));
  await execute(
    `INSERT INTO notice_items (organization_id, notice_id, finding_id, worker_id, date, result_id)
     SELECT $1, x."noticeId", x."findingId", x."workerId", x.date, x."resultId"
     FROM jsonb_to_recordset($2::jsonb) AS x("noticeId" uuid, "findingId" uuid, "workerId" uuid, date date, "resultId" uuid) ON CONFLICT DO NOTHING`,
    [
      organizationId,
      JSON.stringify(items.map((item) => ({ ...item, noticeId: noticeOf.get(keyOf(item)) }))),
    ],
  );
  for (const id of new Set(noticeOf.values())) await queueNotice(organizationId, id, notBefore);
}

export const queueNotice = (organizationId: string, noticeId: string, runAt: Date) =>
  addJob(
    "send-notice",
    { organizationId, noticeId },
    { key: `notice:${noticeId}`, runAt, maxAttempts: 25 },
  );

const changedDays = ({ days }: Recomputation) =>
  JSON.stringify(
    days
      .filter(({ isChanged }) => isChanged)
      .map(({ workerId, date, resultId }) => ({ workerId, date, resultId })),
  );

const unsent: ReadonlySet<string> = new Set(["waiting", "held"]);
const told: ReadonlySet<string> = new Set([
  "sending",
  "sent",
  "possibly-sent",
  "bounced",
  "on-paper",
]);

/** How far the notices are that tell of these days: mostly there are none, and nothing has to follow. */
async function statesOfNotices(days: string): Promise<string[]> {
  if (days === "[]") return [];
  const found = await rows<{ state: string }>(
    `SELECT DISTINCT n.state FROM jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date)
     JOIN notice_items i ON i.worker_id = x."workerId" AND i.date = x.date JOIN notices n ON n.id = i.notice_id`,
    [days],
  );
  return found.map(({ state }) => state);
}

/** Not told yet: the notice follows the new result, and one of which nothing is left is withdrawn. */
async function withdrawUnsent(days: string): Promise<void> {
  await execute(
    `UPDATE notice_items i SET result_id = x."resultId" FROM jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date, "resultId" uuid), notices n
     WHERE i.worker_id = x."workerId" AND i.date = x.date AND x."resultId" IS NOT NULL AND n.id = i.notice_id AND n.state IN ('waiting', 'held')`,
    [days],
  );
  await execute(
    `DELETE FROM notice_items i USING notices n, findings f, jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date)
     WHERE i.worker_id = x."workerId" AND i.date = x.date AND n.id = i.notice_id AND n.state IN ('waiting', 'held')
       AND f.id = i.finding_id AND NOT EXISTS (SELECT 1 FROM finding_evidence e WHERE e.finding_id = f.id AND e.worker_id = i.worker_id AND e.date = i.date)`,
    [days],
  );
  await execute(
    `UPDATE notices n SET state = 'withdrawn', revision = revision + 1 WHERE n.state IN ('waiting', 'held') AND n.kind = 'findings'
       AND NOT EXISTS (SELECT 1 FROM notice_items i WHERE i.notice_id = n.id)`,
  );
}

/** Told already, and the result says another thing now: a level as it is shown, or a verdict of any criterion, as of a peak. */
async function replaceSent({
  organizationId,
  entryId,
  notBefore,
  days,
}: {
  organizationId: string;
  entryId: string;
  notBefore: Date;
  days: string;
}): Promise<void> {
  const sent = await rows<Item & { noticeId: string; siteId: string }>(
    `SELECT DISTINCT ON (n.recipient_id, n.audience, i.finding_id, i.worker_id, i.date) n.id AS "noticeId", n.site_id AS "siteId", n.recipient_id AS "recipientId", n.audience,
       i.finding_id AS "findingId", i.worker_id AS "workerId", i.date::text AS date, x."resultId"
     FROM notices n JOIN notice_items i ON i.notice_id = n.id
     JOIN jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date, "resultId" uuid) ON x."workerId" = i.worker_id AND x.date = i.date
     JOIN day_results told ON told.id = i.result_id JOIN day_results now ON now.id = x."resultId"
     WHERE n.state IN ('sending', 'sent', 'possibly-sent', 'bounced', 'on-paper') AND now.id <> told.id
       AND (now.verdict_at_ear <> told.verdict_at_ear OR now.verdict_outside <> told.verdict_outside
         OR abs(coalesce(now.at_ear_counted_db, now.at_ear_db, 0) - coalesce(told.at_ear_counted_db, told.at_ear_db, 0)) >= 0.05 OR abs(coalesce(now.outside_db, 0) - coalesce(told.outside_db, 0)) >= 0.05
         OR EXISTS (SELECT 1 FROM jsonb_to_recordset(now.criteria->'governing') AS c("criterionId" text, verdict text, "levelDb" float8)
              FULL JOIN jsonb_to_recordset(told.criteria->'governing') AS b("criterionId" text, verdict text, "levelDb" float8) USING ("criterionId")
              WHERE c.verdict IS DISTINCT FROM b.verdict OR abs(coalesce(c."levelDb", 0) - coalesce(b."levelDb", 0)) >= 0.05))
     ORDER BY n.recipient_id, n.audience, i.finding_id, i.worker_id, i.date, n.created_at DESC`,
    [days],
  );
  const bySite = new Map<string, typeof sent>();
  for (const item of sent) bySite.set(item.siteId, [...(bySite.get(item.siteId) ?? []), item]);
  for (const [siteId, items] of bySite) {
    const replaces = new Map(
      items.map(({ recipientId, audience, noticeId }) => [`${recipientId} ${audience}`, noticeId]),
    );
    await writeNotices(organizationId, siteId, entryId, notBefore, items, replaces);
  }
}
