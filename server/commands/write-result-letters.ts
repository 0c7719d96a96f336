import { randomUUID } from "node:crypto";
import { createI18n, isLocale, type Locale } from "../../shared/i18n";
import { RULE_SETS, ruleSetVersion } from "../../shared/rule-sets";
import { resultNoticeOf, tellingCriteria } from "../../shared/rule-sets/result-notice";
import { addDays, localDate } from "../../shared/time/zone";
import { resultsLetter, type ToldDay } from "../emails/results-letter";
import { recordAuditMany } from "../lib/audit";
import { execute, rows } from "../lib/db";
import { groupBy } from "../lib/group-by";
import { queueNotice } from "./schedule-notices";

/** Days that are news: a result entered later than this is history, and no letter goes out about it. */
const TOLD_FOR_DAYS = 31;
/** A worker measured day after day gets one letter a week, unless one of its days is due before. */
const WEEK_DAYS = 7;
/** Days before the due one on which a letter waits no longer. */
const SPARE_DAYS = 3;
/** A letter is put right for as long as this after it was written. */
const CORRECTED_FOR_DAYS = 400;

/** As day results name them, each rule set's highest first. */
const CRITERIA = [
  ...new Set(
    RULE_SETS.flatMap((ruleSet) =>
      tellingCriteria(ruleSet).map(({ id }) => `${ruleSet.key}:${id}`),
    ),
  ),
];

/** The criterion that a result reaches, else the first that it is held against: its verdict and figures. */
const TELLING = (r: string) => `LATERAL (
  SELECT concat(c."ruleSetKey", ':', c."criterionId") AS criterion, c."levelDb" AS level_db, c."dosePct" AS dose_pct,
    coalesce(c.bound, 'exact') AS bound, c.verdict = 'over' AS is_over
  FROM jsonb_to_recordset(${r}.criteria->'governing') AS c("ruleSetKey" text, "criterionId" text, verdict text, "levelDb" float8, "dosePct" float8, bound text)
  WHERE concat(c."ruleSetKey", ':', c."criterionId") = ANY ($1::text[])
  ORDER BY c.verdict = 'over' DESC, array_position($1::text[], concat(c."ruleSetKey", ':', c."criterionId")) LIMIT 1)`;

/** What was told last of each day, by letters that were not withdrawn before they left. */
const TOLD = `told AS (
  SELECT DISTINCT ON (x.worker_id, x.date) x.worker_id, x.date, x.letter_id, x.result_id, x.is_over, x.level_db, l.written_at::date::text AS written_on, n.id AS notice_id, n.state
  FROM result_letter_days x JOIN result_letters l ON l.id = x.letter_id LEFT JOIN notices n ON n.id = l.notice_id
  WHERE l.written_at > now() - interval '${CORRECTED_FOR_DAYS} days' AND n.state IS DISTINCT FROM 'withdrawn'
  ORDER BY x.worker_id, x.date, l.written_at DESC)`;

/** Told, and the day's result says another thing now. */
const DIFFERS =
  "(coalesce(a.is_over, FALSE) <> t.is_over OR abs(coalesce(a.level_db, 0) - coalesce(t.level_db, 0)) >= 0.05)";

const CURRENT = `JOIN days d ON d.worker_id = t.worker_id AND d.date = t.date AND NOT d.is_stale
  JOIN day_results r ON r.id = d.current_result_id AND r.id <> t.result_id LEFT JOIN ${TELLING("r")} a ON TRUE`;

interface Due {
  workerId: string;
  date: string;
  resultId: string;
  criterion: string | null;
  isOver: boolean;
  levelDb: number | null;
  dosePct: number | null;
  bound: ToldDay["bound"];
  atEarDb: number | null;
  ruleSetKey: string;
  ruleSetVersion: number;
  /** The letter that this puts right. */
  replacesId: string | null;
  replacedOn: string | null;
}

interface Reader {
  workerId: string;
  siteId: string;
  name: string;
  employeeNumber: string;
  language: string;
  delayMin: number;
  timeZone: string;
  userId: string | null;
  isTold: boolean;
}

/**
 * Writes the letters that are due: to each worker the days on which they were measured and reached an action value, and
 * what has become of days that were told before. Where the worker has a mail address a notice takes the letter along;
 * else it waits to be printed. Twice at once, or twice over, writes nothing more.
 */
export async function writeResultLetters(organizationId: string, now: Date): Promise<void> {
  await execute("SELECT pg_advisory_xact_lock(hashtextextended('letters:' || $1, 0))", [
    organizationId,
  ]);
  await execute(
    `WITH ${TOLD} UPDATE notices n SET state = 'withdrawn', revision = n.revision + 1 FROM told t ${CURRENT}
     WHERE n.id = t.notice_id AND t.state IN ('waiting', 'held') AND ${DIFFERS}`,
    [CRITERIA],
  );
  const due = await daysToTell(now);
  if (due.length === 0) return;
  const readers = await readersOf([...new Set(due.map(({ workerId }) => workerId))]);
  const ofWorker = groupBy(due, ({ workerId }) => workerId);
  const letters = [];
  for (const reader of readers) {
    const days = ofWorker.get(reader.workerId) ?? [];
    const isHurried =
      days.some(({ replacesId }) => replacesId !== null) ||
      days.some((day) => addDays(dueOn(day), -SPARE_DAYS) <= localDate(now, reader.timeZone));
    if (days.length === 0 || (reader.isTold && !isHurried)) continue;
    // One letter speaks of one rule set: days after a change of rules get their own.
    for (const group of groupBy(days, (day) => `${day.ruleSetKey} ${day.ruleSetVersion}`).values())
      letters.push(await draft(reader, group));
  }
  await store(
    organizationId,
    letters.filter((letter) => letter !== null),
  );
}

const dueOn = ({ date, ruleSetKey }: Due) => addDays(date, resultNoticeOf(ruleSetKey).withinDays);

async function daysToTell(now: Date): Promise<Due[]> {
  const today = "($2::timestamptz AT TIME ZONE s.time_zone)::date";
  const columns = `d.worker_id AS "workerId", d.date::text AS date, r.id AS "resultId", a.criterion, coalesce(a.is_over, FALSE) AS "isOver", a.level_db AS "levelDb",
    a.dose_pct AS "dosePct", coalesce(a.bound, 'exact') AS bound, coalesce(r.at_ear_counted_db, r.at_ear_db) AS "atEarDb",
    r.governing_rule_set AS "ruleSetKey", r.governing_version AS "ruleSetVersion"`;
  return rows<Due>(
    `WITH ${TOLD}
     SELECT ${columns}, NULL::uuid AS "replacesId", NULL AS "replacedOn" FROM day_results r JOIN days d ON d.current_result_id = r.id AND NOT d.is_stale
       JOIN workers w ON w.id = d.worker_id JOIN sites s ON s.id = w.site_id JOIN ${TELLING("r")} a ON a.is_over
     WHERE r.grade = 'measured-worker' AND r.origin = 'computed' AND r.date BETWEEN ${today} - ${TOLD_FOR_DAYS} AND ${today}
       AND NOT EXISTS (SELECT 1 FROM told t WHERE t.worker_id = d.worker_id AND t.date = d.date)
     UNION ALL
     SELECT ${columns}, t.letter_id, t.written_on FROM told t ${CURRENT} WHERE ${DIFFERS}
     ORDER BY 1, 2`,
    [CRITERIA, now],
  );
}

async function readersOf(workerIds: readonly string[]): Promise<Reader[]> {
  return rows<Reader>(
    `SELECT w.id AS "workerId", w.site_id AS "siteId", w.name, w.employee_number AS "employeeNumber", w.language, s.notice_delay_min AS "delayMin", s.time_zone AS "timeZone",
       (SELECT u.id FROM users u WHERE u.worker_id = w.id AND u.revoked_at IS NULL AND u.email IS NOT NULL) AS "userId",
       EXISTS (SELECT 1 FROM result_letters l LEFT JOIN notices n ON n.id = l.notice_id WHERE l.worker_id = w.id
         AND n.state IS DISTINCT FROM 'withdrawn' AND l.written_at > now() - interval '${WEEK_DAYS} days') AS "isTold"
     FROM workers w JOIN sites s ON s.id = w.site_id WHERE w.id = ANY (CAST(:ids AS uuid[])) ORDER BY w.id`,
    { ids: `{${workerIds.join(",")}}` },
  );
}

const dictionaries = new Map<Locale, ReturnType<typeof createI18n>>();

function dictionary(locale: Locale) {
  const known = dictionaries.get(locale) ?? createI18n(locale);
  dictionaries.set(locale, known);
  return known;
}

/** Null where the rule set of those days is not known any more. */
async function draft(reader: Reader, days: readonly Due[]) {
  const [first] = days;
  const ruleSet = first && ruleSetVersion(first.ruleSetKey, first.ruleSetVersion);
  if (!first || !ruleSet) return null;
  const locale = isLocale(reader.language) ? reader.language : "en";
  const corrected = days.find(({ replacesId }) => replacesId !== null);
  const { subject, text } = resultsLetter(await dictionary(locale), locale, {
    workerName: reader.name,
    employeeNumber: reader.employeeNumber,
    ruleSet,
    replacesLetterOf: corrected?.replacedOn ?? null,
    days: days.map((day) => ({
      ...day,
      criterion:
        ruleSet.criteria.find(({ id }) => `${ruleSet.key}:${id}` === day.criterion) ?? null,
    })),
  });
  return {
    id: randomUUID(),
    noticeId: reader.userId === null ? null : randomUUID(),
    ...reader,
    days,
    replacesId: corrected?.replacesId ?? null,
    ruleSet: ruleSet.key,
    ruleSetVersion: ruleSet.version,
    dueOn: days.map(dueOn).toSorted()[0]!,
    language: locale,
    subject,
    text,
  };
}

type Draft = NonNullable<Awaited<ReturnType<typeof draft>>>;

async function store(organizationId: string, letters: readonly Draft[]): Promise<void> {
  if (letters.length === 0) return;
  const mailed = letters.flatMap(({ id, noticeId, userId, siteId, delayMin }) =>
    noticeId === null
      ? []
      : [
          {
            id: noticeId,
            letterId: id,
            siteId,
            recipientId: userId,
            notBefore: new Date(Date.now() + delayMin * 60_000),
            messageId: `<${noticeId}@dinward>`,
          },
        ],
  );
  await execute(
    `INSERT INTO notices (id, organization_id, site_id, recipient_id, entry_id, audience, kind, state, not_before, message_id)
     SELECT x.id, $1, x."siteId", x."recipientId", x."letterId", 'worker', 'results', 'waiting', x."notBefore", x."messageId"
     FROM jsonb_to_recordset($2::jsonb) AS x(id uuid, "letterId" uuid, "siteId" uuid, "recipientId" uuid, "notBefore" timestamptz, "messageId" text)`,
    [organizationId, JSON.stringify(mailed)],
  );
  await execute(
    `INSERT INTO result_letters (id, organization_id, site_id, worker_id, notice_id, replaces_id, rule_set, rule_set_version, due_on, language, subject, body_text)
     SELECT x.id, $1, x."siteId", x."workerId", x."noticeId", x."replacesId", x."ruleSet", x."ruleSetVersion", x."dueOn", x.language, x.subject, x.text
     FROM jsonb_to_recordset($2::jsonb) AS x(id uuid, "siteId" uuid, "workerId" uuid, "noticeId" uuid, "replacesId" uuid, "ruleSet" text,
       "ruleSetVersion" int, "dueOn" date, language text, subject text, text text)`,
    [organizationId, JSON.stringify(letters)],
  );
  await execute(
    `INSERT INTO result_letter_days (organization_id, letter_id, worker_id, date, result_id, criterion, is_over, level_db, dose_pct)
     SELECT $1, x."letterId", x."workerId", x.date, x."resultId", coalesce(x.criterion, ''), x."isOver", x."levelDb", x."dosePct"
     FROM jsonb_to_recordset($2::jsonb) AS x("letterId" uuid, "workerId" uuid, date date, "resultId" uuid, criterion text, "isOver" boolean, "levelDb" float8, "dosePct" float8)`,
    [
      organizationId,
      JSON.stringify(
        letters.flatMap(({ id, days }) => days.map((day) => ({ ...day, letterId: id }))),
      ),
    ],
  );
  for (const { id, notBefore } of mailed) await queueNotice(organizationId, id, notBefore);
  await recordAuditMany(
    { organizationId },
    letters.map(({ id, workerId, days, dueOn: due, replacesId }) => ({
      action: "write-result-letter",
      subjectKind: "letter",
      subjectId: id,
      values: { workerId, dates: days.map(({ date }) => date), dueOn: due, replacesId },
    })),
  );
}
