import type { z } from "zod";
import { mainLimit, RULE_SETS } from "../../shared/rule-sets";
import type { GapKind, GapNames, GapsView } from "../../shared/schemas/waiting";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, visible } from "../lib/policy";
import { dayPolicy, findingPolicy, letterPolicy } from "../policies";
import { TRAINING_DUTIES } from "./training";

type Kind = z.infer<typeof GapKind>;
type GapRow = z.infer<typeof GapNames>["rows"][number];

/** From here on a person counts as being in noise: the lowest action value of the rule sets in common use, dB. */
export const IN_NOISE_DB = 80;
/** Names listed at most; the count is of all. */
const NAMES_LIMIT = 2000;

const atEarKeys = RULE_SETS.filter((ruleSet) => mainLimit(ruleSet).judged === "at-the-ear").map(
  ({ key }) => `'${key}'`,
);
export const judgesAtEar = `d.governing_rule_set IN (${[...new Set(atEarKeys)].join(", ")})`;
/** A line that the rule set does not judge is not missing. */
export const isNotAssessed = `(d.verdict_outside = 'not-assessed' OR (d.verdict_at_ear = 'not-assessed' AND ${judgesAtEar}))`;

/** The days of a site's year that the actor may see with what is needed of their current results: read once for all. */
export const yearDays = (actor: Actor) => `
  year_days AS (
    SELECT d.worker_id, d.date, r.id AS result_id, r.outside_db, coalesce(r.at_ear_counted_db, r.at_ear_db) AS at_ear_db, r.grade, r.verdict_outside, r.verdict_at_ear, r.word, r.reason,
      r.governing_rule_set, r.governing_version
    FROM days d LEFT JOIN day_results r ON r.id = d.current_result_id
    WHERE d.site_id = :siteId AND d.date >= make_date(:year, 1, 1) AND d.date <= make_date(:year, 12, 31) AND ${visible(dayPolicy, actor, "d")})`;

/** Who was told, or not told, about a day: one row per worker, day and notice. */
const notices = (condition: string) => `
  SELECT i.worker_id AS id, string_agg(DISTINCT u.name, ', ') AS note, i.date
  FROM notices n JOIN notice_items i ON i.notice_id = n.id JOIN users u ON u.id = n.recipient_id
  JOIN year_days d ON d.worker_id = i.worker_id AND d.date = i.date
  WHERE ${condition} GROUP BY i.worker_id, i.date`;

/**
 * What is missing in a year, each as a query of (id of a worker, note, date).
 *
 * - not-measured: workers over 80 dB without protection on a day known only from a task's level or an estimate, of whom
 *   no run of that year is recorded; with their job and the last such day.
 * - no-protector: workers with an open finding that a protector is required and none assigned, on a day of that year.
 * - not-fitted: workers over 80 dB with a protector, and no test of theirs within the site's interval before the last such
 *   day; where the site states no interval, never a test with what they wore on it; with their job and that day.
 * - letter-late: letters of results about days of that year that reached their worker after the rule's days, or have not
 *   yet and should have; with the day on which each was due.
 * - not-trained: workers over what their rules' duty to train hangs from, and no training within its interval before the
 *   last such day; with that day.
 * - notice-late: worker and day of which somebody was told more than a day after the entry.
 * - notice-not-sent: worker and day of which a notice failed, is held, has an outcome nobody knows, or is overdue.
 * - not-assessed: days without a verdict on a line that their rule set judges, or without any result.
 */
const gapQueries: Record<Kind, (actor: Actor) => string> = {
  "not-measured": () => `
    SELECT d.worker_id AS id, max(j.name) AS note, max(d.date) AS date
    FROM year_days d JOIN workers w ON w.id = d.worker_id LEFT JOIN jobs j ON j.id = w.job_id
    WHERE d.outside_db > ${IN_NOISE_DB} AND d.grade IN ('task-level', 'estimate')
      AND NOT EXISTS (SELECT 1 FROM runs m WHERE m.worker_id = d.worker_id AND m.date >= make_date(:year, 1, 1)
        AND m.date <= make_date(:year, 12, 31) AND NOT m.is_void AND NOT m.is_out AND m.task_id IS NULL)
    GROUP BY d.worker_id`,
  "no-protector": (actor) => `
    SELECT f.worker_id AS id, max(k.name) AS note, max(d.date) AS date
    FROM findings f JOIN finding_evidence e ON e.finding_id = f.id JOIN year_days d ON d.worker_id = e.worker_id AND d.date = e.date
    JOIN day_results r ON r.id = e.result_id LEFT JOIN tasks k ON k.id = r.deciding_task_id
    WHERE f.kind = 'no-protector' AND f.state <> 'closed' AND ${visible(findingPolicy, actor, "f")}
    GROUP BY f.worker_id`,
  "not-fitted": () => `
    SELECT d.worker_id AS id, d.job AS note, d.date
    FROM (SELECT d.worker_id, max(j.name) AS job, max(d.date) AS date FROM year_days d JOIN day_results r ON r.id = d.result_id AND r.has_protector = 'yes'
      JOIN workers w ON w.id = d.worker_id LEFT JOIN jobs j ON j.id = w.job_id WHERE d.outside_db > ${IN_NOISE_DB} GROUP BY d.worker_id) d
    JOIN sites s ON s.id = :siteId
    WHERE NOT EXISTS (SELECT 1 FROM fit_tests f WHERE f.worker_id = d.worker_id AND NOT f.is_void AND f.tested_on <= make_date(:year, 12, 31)
      AND CASE WHEN s.fit_every_months IS NOT NULL THEN f.tested_on > d.date - make_interval(months => s.fit_every_months)
        ELSE EXISTS (SELECT 1 FROM assignments a WHERE a.worker_id = d.worker_id AND a.valid @> d.date AND f.model_id IN (a.inner_model_id, a.outer_model_id)) END)`,
  "letter-late": (actor) => `
    SELECT l.worker_id AS id, NULL AS note, l.due_on AS date
    FROM result_letters l JOIN sites s ON s.id = l.site_id LEFT JOIN notices n ON n.id = l.notice_id LEFT JOIN notice_acknowledgements a ON a.letter_id = l.id
    WHERE EXISTS (SELECT 1 FROM result_letter_days x JOIN year_days d ON d.worker_id = x.worker_id AND d.date = x.date WHERE x.letter_id = l.id)
      AND n.state IS DISTINCT FROM 'withdrawn' AND NOT EXISTS (SELECT 1 FROM result_letters later WHERE later.replaces_id = l.id)
      AND coalesce(least((n.sent_at AT TIME ZONE s.time_zone)::date, a.signed_on, CASE WHEN a.way = 'link' THEN (a.recorded_at AT TIME ZONE s.time_zone)::date END),
        (now() AT TIME ZONE s.time_zone)::date) > l.due_on AND ${visible(letterPolicy, actor, "l")}`,
  "not-trained": () => `
    SELECT d.worker_id AS id, NULL AS note, max(d.date) AS date FROM year_days d JOIN day_results r ON r.id = d.result_id
    JOIN jsonb_to_recordset(CAST(:duties AS jsonb)) AS k("ruleSetKey" text, over jsonpath, "withinDays" int, "everyMonths" int)
      ON k."ruleSetKey" = d.governing_rule_set AND jsonb_path_exists(r.criteria->'governing', k.over)
    GROUP BY d.worker_id HAVING NOT EXISTS (
      SELECT 1 FROM training_attendances a JOIN training_sessions t ON t.id = a.session_id
      WHERE a.worker_id = d.worker_id AND t.struck_reason IS NULL AND t.held_on <= make_date(:year, 12, 31)
        AND t.held_on > coalesce(max(d.date) - make_interval(months => min(k."everyMonths")), '-infinity'))`,
  "notice-late": () =>
    notices("n.state IN ('sent', 'possibly-sent') AND n.sent_at > n.created_at + interval '1 day'"),
  "notice-not-sent": () =>
    notices(
      "(n.state IN ('failed', 'bounced', 'possibly-sent', 'held') OR (n.state IN ('waiting', 'sending') AND (n.last_error IS NOT NULL OR n.not_before < now() - interval '1 day')))",
    ),
  "not-assessed": () => `
    SELECT d.worker_id AS id, coalesce(d.reason, CASE WHEN d.result_id IS NULL THEN 'not-computed' END) AS note, d.date
    FROM year_days d
    WHERE (${isNotAssessed} OR (d.result_id IS NULL AND EXISTS (
      SELECT 1 FROM shifts f WHERE f.worker_id = d.worker_id AND f.date = d.date AND NOT f.is_void)))`,
};

export interface YearOfSite {
  siteId: string;
  year: number;
}

/** What is missing in a site's year, and its months in figures. A fixed number of statements. */
export async function yearGaps(
  actor: Actor,
  { siteId, year }: YearOfSite,
): Promise<z.input<typeof GapsView>> {
  const values = { siteId, year, duties: TRAINING_DUTIES };
  const kinds = Object.keys(gapQueries) as Kind[];
  const counts = kinds.map(
    (kind) =>
      `SELECT '${kind}' AS kind, count(*)::int AS count FROM (${gapQueries[kind](actor)}) g`,
  );
  const months = `SELECT extract(month FROM d.date)::int AS month, count(*)::int AS days,
       count(*) FILTER (WHERE d.verdict_at_ear = 'over')::int AS over,
       count(*) FILTER (WHERE d.verdict_at_ear = 'cant-tell-yet')::int AS "cantTell",
       count(*) FILTER (WHERE ${isNotAssessed})::int AS "notAssessed",
       count(*) FILTER (WHERE d.verdict_outside = 'over')::int AS "overOutside",
       count(*) FILTER (WHERE d.verdict_outside = 'cant-tell-yet')::int AS "cantTellOutside",
       count(*) FILTER (WHERE d.word IN ('too-little', 'too-much'))::int AS "protectorFault",
       count(*) FILTER (WHERE (d.worker_id, d.date) IN (SELECT f.worker_id, f.date FROM shifts f WHERE f.revision > 1))::int AS corrected,
       percentile_cont(0.5) WITHIN GROUP (ORDER BY d.at_ear_db) AS "medianAtEarDb",
       percentile_cont(0.5) WITHIN GROUP (ORDER BY d.outside_db) AS "medianOutsideDb"
     FROM year_days d WHERE d.result_id IS NOT NULL GROUP BY 1 ORDER BY 1`;
  const ruleSets = `SELECT DISTINCT d.governing_rule_set AS key, d.governing_version AS version
     FROM year_days d WHERE d.result_id IS NOT NULL ORDER BY 1, 2`;
  const found = only(
    await rows<Omit<z.input<typeof GapsView>, "years"> & { hasNoInterval: boolean }>(
      `WITH ${yearDays(actor)}
     SELECT (SELECT json_agg(q) FROM (${counts.join(" UNION ALL ")}) q) AS counts,
       (SELECT coalesce(json_agg(q), '[]') FROM (${months}) q) AS months,
       (SELECT coalesce(json_agg(q), '[]') FROM (${ruleSets}) q) AS "ruleSets",
       (SELECT s.fit_every_months IS NULL FROM sites s WHERE s.id = :siteId) AS "hasNoInterval"`,
      values,
    ),
  );
  const years = await rows<{ year: number }>(
    `WITH span AS (SELECT min(d.date) AS first, max(d.date) AS last FROM days d WHERE d.site_id = :siteId)
     SELECT y AS year FROM span, generate_series(extract(year FROM span.last)::int, extract(year FROM span.first)::int, -1) y
     WHERE EXISTS (SELECT 1 FROM days d WHERE d.site_id = :siteId AND d.date BETWEEN make_date(y, 1, 1) AND make_date(y, 12, 31) AND ${visible(dayPolicy, actor, "d")})`,
    values,
  );
  const { hasNoInterval, ...rest } = found;
  return {
    ...rest,
    counts: rest.counts.map((gap) =>
      gap.kind === "not-fitted" && hasNoInterval ? { ...gap, hasNoInterval } : gap,
    ),
    years: years.map(({ year: one }) => one),
  };
}

/** The names behind one count. */
export async function gapNames(
  actor: Actor,
  { siteId, year }: YearOfSite,
  kind: Kind,
): Promise<GapRow[]> {
  return rows<GapRow>(
    `WITH ${yearDays(actor)}
     SELECT g.id, w.name, w.employee_number AS "employeeNumber", g.note, g.date::text AS date
     FROM (${gapQueries[kind](actor)}) g JOIN workers w ON w.id = g.id ORDER BY g.date DESC, w.employee_number LIMIT ${NAMES_LIMIT}`,
    { siteId, year, duties: TRAINING_DUTIES },
  );
}
