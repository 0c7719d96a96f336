import type { z } from "zod";
import { mainLimit, RULE_SETS } from "../../shared/rule-sets";
import type { GapKind, GapNames, GapsView } from "../../shared/schemas/waiting";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { dayPolicy, findingPolicy } from "../policies";

type Kind = z.infer<typeof GapKind>;
type GapRow = z.infer<typeof GapNames>["rows"][number];

/** From here on a person counts as being in noise: the lowest action value of the rule sets in common use, dB. */
const IN_NOISE_DB = 80;
/** Names listed at most; the count is of all. */
const NAMES_LIMIT = 2000;

const atEarKeys = RULE_SETS.filter((ruleSet) => mainLimit(ruleSet).judged === "at-the-ear").map(
  ({ key }) => `'${key}'`,
);
const judgesAtEar = `r.governing_rule_set IN (${[...new Set(atEarKeys)].join(", ")})`;
/** A line that the rule set does not judge is not missing. */
const isNotAssessed = `(r.verdict_outside = 'not-assessed' OR (r.verdict_at_ear = 'not-assessed' AND ${judgesAtEar}))`;

/** The days of a site's year that the actor may see, `d`, with their current results, `r`. */
const inYear = (actor: Actor, d = "d") =>
  `${d}.site_id = :siteId AND ${d}.date >= make_date(:year, 1, 1) AND ${d}.date <= make_date(:year, 12, 31) AND ${visible(dayPolicy, actor, d)}`;

/** Who was told, or not told, about a day: one row per worker, day and notice. */
const notices = (actor: Actor, condition: string) => `
  SELECT i.worker_id AS id, string_agg(DISTINCT u.name, ', ') AS note, i.date
  FROM notices n JOIN notice_items i ON i.notice_id = n.id JOIN users u ON u.id = n.recipient_id
  JOIN days d ON d.worker_id = i.worker_id AND d.date = i.date
  WHERE ${inYear(actor)} AND ${condition} GROUP BY i.worker_id, i.date`;

/**
 * What is missing in a year, each as a query of (id of a worker, note, date).
 *
 * - not-measured: workers over 80 dB without protection on a day known only from a task's level or an estimate, of whom
 *   no run of that year is recorded; with their job and the last such day.
 * - no-protector: workers with an open finding that a protector is required and none assigned, on a day of that year.
 * - notice-late: worker and day of which somebody was told more than a day after the entry.
 * - notice-not-sent: worker and day of which a notice failed, is held, has an outcome nobody knows, or is overdue.
 * - not-assessed: days without a verdict on a line that their rule set judges, or without any result.
 */
const gapQueries: Record<Kind, (actor: Actor) => string> = {
  "not-measured": (actor) => `
    SELECT d.worker_id AS id, max(j.name) AS note, max(d.date) AS date
    FROM days d JOIN day_results r ON r.id = d.current_result_id JOIN workers w ON w.id = d.worker_id LEFT JOIN jobs j ON j.id = w.job_id
    WHERE ${inYear(actor)} AND r.outside_db > ${IN_NOISE_DB} AND r.grade IN ('task-level', 'estimate')
      AND NOT EXISTS (SELECT 1 FROM runs m WHERE m.worker_id = d.worker_id AND m.date >= make_date(:year, 1, 1)
        AND m.date <= make_date(:year, 12, 31) AND NOT m.is_void)
    GROUP BY d.worker_id`,
  "no-protector": (actor) => `
    SELECT f.worker_id AS id, max(k.name) AS note, max(d.date) AS date
    FROM findings f JOIN finding_evidence e ON e.finding_id = f.id JOIN days d ON d.worker_id = e.worker_id AND d.date = e.date
    JOIN day_results r ON r.id = e.result_id LEFT JOIN tasks k ON k.id = r.deciding_task_id
    WHERE f.kind = 'no-protector' AND f.state <> 'closed' AND ${visible(findingPolicy, actor, "f")} AND ${inYear(actor)}
    GROUP BY f.worker_id`,
  "notice-late": (actor) =>
    notices(
      actor,
      "n.state IN ('sent', 'possibly-sent') AND n.sent_at > n.created_at + interval '1 day'",
    ),
  "notice-not-sent": (actor) =>
    notices(
      actor,
      "(n.state IN ('failed', 'possibly-sent', 'held') OR (n.state IN ('waiting', 'sending') AND (n.last_error IS NOT NULL OR n.not_before < now() - interval '1 day')))",
    ),
  "not-assessed": (actor) => `
    SELECT d.worker_id AS id, coalesce(r.reason, CASE WHEN r.id IS NULL THEN 'not-computed' END) AS note, d.date
    FROM days d LEFT JOIN day_results r ON r.id = d.current_result_id
    WHERE ${inYear(actor)} AND (${isNotAssessed} OR (r.id IS NULL AND EXISTS (
      SELECT 1 FROM shifts f WHERE f.worker_id = d.worker_id AND f.date = d.date AND NOT f.is_void)))`,
};

interface YearOfSite {
  siteId: string;
  year: number;
}

/** What is missing in a site's year, and its months in figures. A fixed number of statements. */
export async function yearGaps(
  actor: Actor,
  { siteId, year }: YearOfSite,
): Promise<z.input<typeof GapsView>> {
  const values = { siteId, year };
  const kinds = Object.keys(gapQueries) as Kind[];
  const counts = await rows<{ kind: Kind; count: number }>(
    kinds
      .map(
        (kind) =>
          `SELECT '${kind}' AS kind, count(*)::int AS count FROM (${gapQueries[kind](actor)}) g`,
      )
      .join(" UNION ALL "),
    values,
  );
  const months = await rows<z.input<typeof GapsView>["months"][number]>(
    `SELECT extract(month FROM d.date)::int AS month, count(*)::int AS days,
       count(*) FILTER (WHERE r.verdict_at_ear = 'over')::int AS over,
       count(*) FILTER (WHERE r.verdict_at_ear = 'cant-tell-yet')::int AS "cantTell",
       count(*) FILTER (WHERE ${isNotAssessed})::int AS "notAssessed",
       count(*) FILTER (WHERE r.verdict_outside = 'over')::int AS "overOutside",
       count(*) FILTER (WHERE r.verdict_outside = 'cant-tell-yet')::int AS "cantTellOutside",
       count(*) FILTER (WHERE r.word IN ('too-little', 'too-much'))::int AS "protectorFault",
       count(*) FILTER (WHERE EXISTS (SELECT 1 FROM shifts f WHERE f.worker_id = d.worker_id AND f.date = d.date AND f.revision > 1))::int AS corrected,
       percentile_cont(0.5) WITHIN GROUP (ORDER BY r.at_ear_db) AS "medianAtEarDb",
       percentile_cont(0.5) WITHIN GROUP (ORDER BY r.outside_db) AS "medianOutsideDb"
     FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE ${inYear(actor)} GROUP BY 1 ORDER BY 1`,
    values,
  );
  const years = await rows<{ year: number }>(
    `WITH span AS (SELECT min(d.date) AS first, max(d.date) AS last FROM days d WHERE d.site_id = :siteId)
     SELECT y AS year FROM span, generate_series(extract(year FROM span.last)::int, extract(year FROM span.first)::int, -1) y
     WHERE EXISTS (SELECT 1 FROM days d WHERE d.site_id = :siteId AND d.date BETWEEN make_date(y, 1, 1) AND make_date(y, 12, 31))`,
    values,
  );
  const ruleSets = await rows<{ key: string; version: number }>(
    `SELECT DISTINCT r.governing_rule_set AS key, r.governing_version AS version
     FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE ${inYear(actor)} ORDER BY 1, 2`,
    values,
  );
  return { counts, months, years: years.map((found) => found.year), ruleSets };
}

/** The names behind one count. */
export async function gapNames(
  actor: Actor,
  { siteId, year }: YearOfSite,
  kind: Kind,
): Promise<GapRow[]> {
  return rows<GapRow>(
    `SELECT g.id, w.name, w.employee_number AS "employeeNumber", g.note, g.date::text AS date
     FROM (${gapQueries[kind](actor)}) g JOIN workers w ON w.id = g.id ORDER BY g.date DESC, w.employee_number LIMIT ${NAMES_LIMIT}`,
    { siteId, year },
  );
}
