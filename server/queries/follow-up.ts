import type { EscalationView, FollowUpView, MeasureView } from "../../shared/schemas/follow-up";
import { row, rows } from "../lib/db";
import { inForce } from "../lib/grants";
import { type Actor, visible } from "../lib/policy";
import type { Finding } from "../models/finding";
import { dayPolicy, findingFilePolicy, findingPolicy, runPolicy, sitePolicy } from "../policies";
import {
  DAY_FIGURES_COLUMNS,
  type DayFiguresRow,
  presentDayFigures,
} from "../presenters/day-figures";

type MeasureRow = Omit<MeasureView, "createdAt"> & { createdAt: Date };

const SELECT_MEASURES = `SELECT m.id, m.finding_id AS "findingId", m.control, m.what, m.owner_id AS "ownerId", o.name AS "ownerName",
    m.planned_on::text AS "plannedOn", m.done_on::text AS "doneOn", m.struck_reason AS "struckReason", u.name AS "authorName",
    m.created_at AS "createdAt", m.revision
  FROM finding_measures m LEFT JOIN users o ON o.id = m.owner_id LEFT JOIN users u ON u.id = m.author_id`;

const presentMeasure = ({ createdAt, ...measure }: MeasureRow): MeasureView => ({
  ...measure,
  createdAt: createdAt.toISOString(),
});

/** One measure of a finding that the actor may see; null where it has no such measure. */
export async function findMeasure(findingId: string, id: string): Promise<MeasureView | null> {
  const found = await row<MeasureRow>(
    `${SELECT_MEASURES} WHERE m.finding_id = :findingId AND m.id = :id FOR UPDATE OF m`,
    { findingId, id },
  );
  return found && presentMeasure(found);
}

/** Who may have a finding of a site in hand: its officers and supervisors. */
export const listOwners = (siteId: string) =>
  rows<{ id: string; name: string }>(
    `SELECT u.id, u.name FROM users u WHERE u.revoked_at IS NULL AND EXISTS (SELECT 1 FROM role_grants g
       WHERE g.user_id = u.id AND g.role IN ('officer', 'supervisor') AND ${inForce("g")} AND (g.site_id IS NULL OR g.site_id = :siteId))
     ORDER BY u.name, u.id`,
    { siteId },
  );

const RUNS_AT_MOST = 5;

/** The day's own runs, and the latest of each task that decides the day, so far as the actor may see them. */
async function trustedRuns(actor: Actor, finding: Finding): Promise<FollowUpView["runs"]> {
  if (finding.lastResultId === null) return [];
  return rows<FollowUpView["runs"][number]>(
    `WITH result AS (SELECT r.worker_id, r.date, r.deciding_task_id, r.refs FROM day_results r WHERE r.id = :resultId),
     task AS (
       SELECT deciding_task_id AS id FROM result WHERE deciding_task_id IS NOT NULL
       UNION SELECT k.task_id FROM result, jsonb_path_query(refs, '$.shifts[*].revisionId') x
         JOIN shift_tasks k ON k.shift_revision_id = CAST(x #>> '{}' AS uuid) WHERE deciding_task_id IS NULL),
     own AS (
       SELECT r.id FROM result d JOIN runs r ON r.worker_id = d.worker_id AND r.date = d.date WHERE NOT r.is_void AND NOT r.is_out),
     of_task AS (
       SELECT x.id FROM task t CROSS JOIN LATERAL (SELECT r.id FROM runs r
         WHERE r.task_id = t.id AND NOT r.is_void AND NOT r.is_out ORDER BY r.date DESC, r.id DESC LIMIT ${RUNS_AT_MOST}) x)
     SELECT r.id AS "runId", EXISTS (SELECT 1 FROM own WHERE own.id = r.id) AS "isOfTheDay", t.name AS "taskName", w.name AS "workerName",
       r.date::text AS date, g.average_db AS "averageDb", g.exchange_rate_db AS "exchangeRateDb", v.check_before_db AS "checkBeforeDb",
       v.check_after_db AS "checkAfterDb", v.doubts, v.kept_reason AS "keptReason", v.unusual
     FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id LEFT JOIN tasks t ON t.id = r.task_id LEFT JOIN workers w ON w.id = r.worker_id
     LEFT JOIN LATERAL (SELECT e.average_db, e.exchange_rate_db FROM readings e WHERE e.run_revision_id = v.id AND e.average_db IS NOT NULL
       ORDER BY e.position LIMIT 1) g ON TRUE
     WHERE r.id IN (SELECT id FROM own UNION SELECT id FROM of_task) AND ${visible(runPolicy, actor, "r")}
     ORDER BY "isOfTheDay" DESC, t.name NULLS FIRST, r.date DESC, r.id DESC LIMIT 40`,
    { resultId: finding.lastResultId },
  );
}

type Side = NonNullable<FollowUpView["proof"]>["before"];

interface SideRow {
  days: number;
  median: number | null;
  lowest: number | null;
  highest: number | null;
  lowestAtEar: number | null;
  highestAtEar: number | null;
}

/**
 * Measured days before and after a date, without protection and at the ear, of the worker or the group that the finding is
 * about. Only exact figures under the rule set that the finding rests on: another's are another quantity.
 */
async function proofSide(
  actor: Actor,
  finding: Finding,
  doneOn: string,
  side: "before" | "after",
): Promise<Side> {
  const from = `FROM day_results r JOIN days d ON d.current_result_id = r.id JOIN workers w ON w.id = r.worker_id
    WHERE ${finding.workerId ? "r.worker_id = :subjectId" : "w.job_id = :subjectId"} AND r.site_id = :siteId
      AND r.date ${side === "before" ? "<" : ">"} :doneOn AND r.grade IN ('measured-worker', 'measured-group')
      AND r.outside_db IS NOT NULL AND r.outside_bound = 'exact'
      AND r.governing_rule_set = (SELECT b.governing_rule_set FROM day_results b WHERE b.id = :resultId) AND ${visible(dayPolicy, actor, "r")}`;
  const values = {
    subjectId: finding.workerId ?? finding.jobId,
    siteId: finding.siteId,
    doneOn,
    resultId: finding.lastResultId,
  };
  const atEar = "FILTER (WHERE coalesce(r.at_ear_bound, 'exact') = 'exact')";
  const [summary] = await rows<SideRow>(
    `SELECT count(*)::int AS days, percentile_cont(0.5) WITHIN GROUP (ORDER BY r.outside_db) AS median, min(r.outside_db) AS lowest,
       max(r.outside_db) AS highest,
       min(coalesce(r.at_ear_counted_db, r.at_ear_db)) ${atEar} AS "lowestAtEar",
       max(coalesce(r.at_ear_counted_db, r.at_ear_db)) ${atEar} AS "highestAtEar" ${from}`,
    values,
  );
  const latest = await rows<DayFiguresRow & { ofWorkerId: string; ofWorkerName: string }>(
    `SELECT ${DAY_FIGURES_COLUMNS("r")}, w.id AS "ofWorkerId", w.name AS "ofWorkerName" ${from} ORDER BY r.date DESC, w.name, w.id LIMIT 5`,
    values,
  );
  return {
    days: summary?.days ?? 0,
    medianOutsideDb: summary?.median ?? null,
    lowestOutsideDb: summary?.lowest ?? null,
    highestOutsideDb: summary?.highest ?? null,
    lowestAtEarDb: summary?.lowestAtEar ?? null,
    highestAtEarDb: summary?.highestAtEar ?? null,
    latest: latest.map(({ ofWorkerId, ofWorkerName, ...figures }) => ({
      ...presentDayFigures(figures),
      worker: { id: ofWorkerId, name: ofWorkerName },
    })),
  };
}

async function proofOf(
  actor: Actor,
  finding: Finding,
  measures: readonly MeasureView[],
): Promise<FollowUpView["proof"]> {
  const [doneOn] = measures
    .flatMap((measure) =>
      measure.struckReason === null && measure.doneOn !== null ? [measure.doneOn] : [],
    )
    .sort();
  if (doneOn === undefined || finding.lastResultId === null) return null;
  return {
    doneOn,
    before: await proofSide(actor, finding, doneOn, "before"),
    after: await proofSide(actor, finding, doneOn, "after"),
  };
}

/** Papers of a finding, the latest first, for whoever may read them. */
async function listFiles(actor: Actor, findingId: string): Promise<FollowUpView["files"]> {
  const found = await rows<Omit<FollowUpView["files"][number], "createdAt"> & { createdAt: Date }>(
    `SELECT p.id, p.file_id AS "fileId", p.title, f.name AS "fileName", f.size_bytes::float8 AS "sizeBytes", u.name AS "authorName",
       p.created_at AS "createdAt"
     FROM finding_files p JOIN files f ON f.id = p.file_id JOIN findings n ON n.id = p.finding_id LEFT JOIN users u ON u.id = p.author_id
     WHERE p.finding_id = :findingId AND NOT p.is_removed AND ${visible(findingFilePolicy, actor, "n")} ORDER BY p.created_at DESC, p.id`,
    { findingId },
  );
  return found.map(({ createdAt, ...file }) => ({ ...file, createdAt: createdAt.toISOString() }));
}

/** What hangs on a finding beside its days: whether it can be trusted, what would mend it, and whether that did. */
export async function followUpOf(actor: Actor, finding: Finding): Promise<FollowUpView> {
  const grade = await row<Pick<FollowUpView, "grade">>(
    "SELECT r.grade FROM day_results r WHERE r.id = :id",
    { id: finding.lastResultId },
  );
  const found = await rows<MeasureRow>(
    `${SELECT_MEASURES} WHERE m.finding_id = :id ORDER BY coalesce(m.done_on, m.planned_on), m.created_at, m.id`,
    { id: finding.id },
  );
  const measures = found.map(presentMeasure);
  return {
    grade: grade?.grade ?? null,
    runs: await trustedRuns(actor, finding),
    measures,
    proof: await proofOf(actor, finding, measures),
    files: await listFiles(actor, finding.id),
    owners: findingPolicy.can.handle(actor, finding) ? await listOwners(finding.siteId) : [],
  };
}

/** Who reads a site's findings and has an address for mail. */
const PEOPLE_OF_SITE = `SELECT u.id, u.name FROM users u WHERE u.revoked_at IS NULL AND u.email IS NOT NULL AND u.organization_id = s.organization_id
  AND EXISTS (SELECT 1 FROM role_grants g WHERE g.user_id = u.id AND g.role IN ('officer', 'auditor') AND ${inForce("g")} AND g.year IS NULL
    AND (g.site_id IS NULL OR g.site_id = s.id)) ORDER BY u.name, u.id`;

/** Whom overdue findings go up to, site by site. */
export async function listEscalations(
  actor: Actor,
  siteId: string | null = null,
): Promise<EscalationView[]> {
  const found = await rows<Omit<EscalationView, "canChange">>(
    `SELECT s.id AS "siteId", s.name AS "siteName", s.escalation_user_id AS "userId", e.name AS "userName", s.revision,
       coalesce((SELECT json_agg(p) FROM (${PEOPLE_OF_SITE}) p), '[]') AS people
     FROM sites s LEFT JOIN users e ON e.id = s.escalation_user_id
     WHERE ${visible(sitePolicy, actor, "s")} AND (CAST(:siteId AS uuid) IS NULL OR s.id = :siteId) ORDER BY s.name`,
    { siteId },
  );
  return found.map((site) => ({
    ...site,
    canChange: sitePolicy.can.changeRules(actor, { id: site.siteId }),
  }));
}
