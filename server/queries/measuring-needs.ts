import type { MeasuringNeed, MeasuringNeeds, MeasuringReason } from "../../shared/schemas/survey";
import { rows } from "../lib/db";
import { type Actor, abilities, visible } from "../lib/policy";
import { sitePolicy, surveyPolicy } from "../policies";
import { protectorsToReview } from "./chosen-before";

const UNDECIDED_DAYS = 90;

type Reasons<Code extends MeasuringReason["code"]> = Omit<
  Extract<MeasuringReason, { code: Code }>,
  "code"
>;

interface NeedRow extends Omit<MeasuringNeed, "reasons"> {
  neverMeasured: string[];
  neverMeasuredIds: string[];
  tooLongAgo: Reasons<"measured-too-long-ago"> | null;
  changes: Reasons<"changed-since">[];
  undecided: Reasons<"undecided"> | null;
  doubtful: Reasons<"doubtful-instrument">[];
}

/** Most serious first: what the group's order hangs on. */
const ORDER: readonly MeasuringReason["code"][] = [
  "changed-since",
  "never-measured",
  "doubtful-instrument",
  "undecided",
  "measured-too-long-ago",
];

function reasonsOf(found: NeedRow): MeasuringReason[] {
  const reasons: MeasuringReason[] = found.changes.map((change) => ({
    code: "changed-since",
    ...change,
  }));
  if (found.neverMeasured.length > 0)
    reasons.push({
      code: "never-measured",
      taskNames: found.neverMeasured,
      taskIds: found.neverMeasuredIds,
    });
  for (const one of found.doubtful) reasons.push({ code: "doubtful-instrument", ...one });
  if (found.undecided) reasons.push({ code: "undecided", ...found.undecided });
  if (found.tooLongAgo) reasons.push({ code: "measured-too-long-ago", ...found.tooLongAgo });
  return reasons;
}

/** Sites at which the actor reads measuring, with the interval each states. */
export async function remeasuring(
  actor: Actor,
  id: string | null = null,
): Promise<MeasuringNeeds["sites"]> {
  const at = actor.at("s.id", "officer", "auditor") || "FALSE";
  const found = await rows<Omit<MeasuringNeeds["sites"][number], "can">>(
    `SELECT s.id, s.name, s.remeasure_after_months AS "remeasureAfterMonths", s.revision FROM sites s
     WHERE ${visible(sitePolicy, actor, "s")} AND ${at} AND (CAST(:id AS uuid) IS NULL OR s.id = :id) ORDER BY s.name`,
    { id },
  );
  return found.map((site) => ({
    ...site,
    can: { changeRules: abilities(sitePolicy, actor, site).changeRules },
  }));
}

/**
 * Which groups want measuring, and why; the worst first, what nobody has taken up before what a survey is under way for.
 * A group is a job that somebody holds.
 */
export async function measuringNeeds(actor: Actor, siteId: string | null): Promise<MeasuringNeeds> {
  const found = await rows<NeedRow>(
    `WITH groups AS MATERIALIZED (
       SELECT j.id, j.name, j.site_id, s.name AS site_name, s.remeasure_after_months AS months,
         (now() AT TIME ZONE s.time_zone)::date AS today, count(w.id)::int AS workers
       FROM jobs j JOIN sites s ON s.id = j.site_id JOIN workers w ON w.job_id = j.id AND (w.left_on IS NULL OR w.left_on >= current_date)
       WHERE NOT j.is_archived AND ${visible(surveyPolicy, actor, "j")} AND (CAST(:siteId AS uuid) IS NULL OR j.site_id = :siteId)
       GROUP BY j.id, s.id),
     levels AS MATERIALIZED (
       SELECT g.id AS job_id, t.id AS task_id, t.name, t.area_id, l.id AS level_id, l.effective_from,
         l.id IS NOT NULL AND l.grade <> 'estimate' AND l.samples_db <> '{}' AS is_measured
       FROM groups g JOIN job_tasks n ON n.job_id = g.id JOIN tasks t ON t.id = n.task_id
       LEFT JOIN LATERAL (SELECT x.id, x.effective_from, x.grade, x.samples_db FROM task_levels x
         WHERE x.task_id = t.id AND x.effective_from <= g.today ORDER BY x.effective_from DESC, x.number DESC LIMIT 1) l ON TRUE),
     of_tasks AS (
       SELECT job_id, array_agg(name ORDER BY name) FILTER (WHERE NOT is_measured) AS never,
         array_agg(task_id ORDER BY name) FILTER (WHERE NOT is_measured) AS never_ids,
         min(effective_from) FILTER (WHERE is_measured) AS oldest, min(effective_from) AS earliest
       FROM levels GROUP BY job_id),
     -- What a change concerns: tasks of the group, and those of an area, with a level from before; or the job as a whole.
     concerned AS (
       SELECT g.id AS job_id, c.id, c.kind, c.what, c.happened_on,
         array_agg(v.task_id) FILTER (WHERE v.task_id IS NOT NULL) AS task_ids, array_agg(v.area_id) FILTER (WHERE v.area_id IS NOT NULL) AS area_ids
       FROM groups g JOIN workplace_changes c ON c.site_id = g.site_id AND c.struck_reason IS NULL
       LEFT JOIN levels v ON v.job_id = g.id AND (v.task_id = c.task_id OR v.area_id = c.area_id OR c.job_id = g.id)
         AND (v.effective_from IS NULL OR v.effective_from < c.happened_on)
       WHERE v.task_id IS NOT NULL OR (c.job_id = g.id AND NOT EXISTS (SELECT 1 FROM levels x WHERE x.job_id = g.id))
       GROUP BY g.id, c.id),
     changed AS (
       SELECT c.job_id, json_agg(json_build_object('changeId', c.id, 'kind', c.kind, 'what', c.what, 'happenedOn', c.happened_on::text,
         'taskIds', coalesce(c.task_ids, '{}'),
         'assignmentsCount', (SELECT count(*)::int FROM assignments a JOIN workers w ON w.id = a.worker_id
            WHERE w.job_id = c.job_id AND a.valid @> current_date AND lower(a.valid) < c.happened_on
              AND (a.task_id = ANY (c.task_ids) OR a.area_id = ANY (c.area_ids) OR (a.task_id IS NULL AND a.area_id IS NULL))
              AND NOT EXISTS (SELECT 1 FROM protectors_looked_at k WHERE k.change_id = c.id AND k.assignment_id = a.id)))
         ORDER BY c.happened_on DESC, c.id) AS list
       FROM concerned c GROUP BY c.job_id),
     open_days AS (
       SELECT w.job_id, count(*)::int AS days, count(DISTINCT d.worker_id)::int AS workers
       FROM groups g JOIN workers w ON w.job_id = g.id JOIN days d ON d.worker_id = w.id JOIN day_results r ON r.id = d.current_result_id
       WHERE d.date > current_date - ${UNDECIDED_DAYS} AND 'cant-tell-yet' IN (r.verdict_outside, r.verdict_at_ear)
       GROUP BY w.job_id),
     failed AS (
       SELECT i.id, i.serial_number,
         (SELECT max(p.done_on) FROM instrument_calibrations p WHERE p.instrument_id = i.id AND p.has_passed) AS good_on
       FROM instruments i WHERE (SELECT NOT c.has_passed FROM instrument_calibrations c WHERE c.instrument_id = i.id
         ORDER BY c.done_on DESC, c.created_at DESC LIMIT 1)),
     doubtful_runs AS (
       SELECT v.job_id, f.id AS instrument_id, f.serial_number, r.id AS run_id
       FROM failed f JOIN runs r ON r.instrument_id = f.id JOIN task_level_samples p ON p.run_id = r.id JOIN levels v ON v.level_id = p.task_level_id
       JOIN run_revisions q ON q.id = r.current_revision_id
       WHERE NOT r.is_void AND q.kept_reason IS NULL AND (f.good_on IS NULL OR r.date >= f.good_on)
       UNION
       SELECT w.job_id, f.id, f.serial_number, r.id
       FROM failed f JOIN runs r ON r.instrument_id = f.id JOIN workers w ON w.id = r.worker_id JOIN groups g ON g.id = w.job_id
       JOIN run_revisions q ON q.id = r.current_revision_id
       WHERE NOT r.is_void AND NOT r.is_out AND q.kept_reason IS NULL AND (f.good_on IS NULL OR r.date >= f.good_on)),
     doubtful AS (
       SELECT job_id, json_agg(json_build_object('serialNumber', serial_number, 'runsCount', runs) ORDER BY serial_number) AS list
       FROM (SELECT job_id, instrument_id, serial_number, count(DISTINCT run_id)::int AS runs FROM doubtful_runs
             GROUP BY job_id, instrument_id, serial_number) x GROUP BY job_id)
     SELECT g.site_id AS "siteId", g.site_name AS "siteName", g.id AS "jobId", g.name AS "jobName", g.workers AS "workersCount",
       coalesce(t.never, '{}') AS "neverMeasured", coalesce(t.never_ids, '{}') AS "neverMeasuredIds",
       CASE WHEN t.oldest + make_interval(months => g.months) <= g.today THEN json_build_object('measuredOn', t.oldest::text,
         'dueOn', (t.oldest + make_interval(months => g.months))::date::text) END AS "tooLongAgo",
       coalesce(c.list, '[]') AS changes,
       CASE WHEN d.days > 0 THEN json_build_object('daysCount', d.days, 'workersCount', d.workers) END AS undecided,
       coalesce(b.list, '[]') AS doubtful,
       (SELECT y.id FROM surveys y WHERE y.job_id = g.id AND y.state IN ('planned', 'measuring') ORDER BY y.from_date DESC LIMIT 1) AS "surveyId"
     FROM groups g LEFT JOIN of_tasks t ON t.job_id = g.id LEFT JOIN changed c ON c.job_id = g.id
     LEFT JOIN open_days d ON d.job_id = g.id LEFT JOIN doubtful b ON b.job_id = g.id`,
    { siteId },
  );
  const needs = found.flatMap((one): MeasuringNeed[] => {
    const reasons = reasonsOf(one);
    if (reasons.length === 0) return [];
    const { siteId: site, siteName, jobId, jobName, workersCount, surveyId } = one;
    return [{ siteId: site, siteName, jobId, jobName, workersCount, surveyId, reasons }];
  });
  const rank = ({ reasons }: MeasuringNeed) =>
    Math.min(...reasons.map(({ code }) => ORDER.indexOf(code)));
  needs.sort(
    (a, b) =>
      Number(a.surveyId !== null) - Number(b.surveyId !== null) ||
      rank(a) - rank(b) ||
      b.reasons.length - a.reasons.length ||
      b.workersCount - a.workersCount ||
      (a.jobName < b.jobName ? -1 : 1),
  );
  return {
    rows: needs,
    groupsCount: found.length,
    protectors: await protectorsToReview(actor, siteId),
    sites: await remeasuring(actor, siteId),
  };
}
