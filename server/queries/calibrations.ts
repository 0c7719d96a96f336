import type { CalibrationHistory, CalibrationView } from "../../shared/schemas/outing";
import {
  type CalibrationState,
  fieldCheckDriftDb,
  isWithinTolerance,
} from "../../shared/schemas/run-doubts";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { runPolicy } from "../policies";

/** SQL: the day of a calibration that an instrument failed and that none has followed, as text; null: none. */
export const FAILED_ON = (
  instrumentId: string,
) => `(SELECT CASE WHEN NOT c.has_passed THEN c.done_on::text END
  FROM instrument_calibrations c WHERE c.instrument_id = ${instrumentId} ORDER BY c.done_on DESC, c.created_at DESC LIMIT 1)`;

/** What the laboratory had said of these instruments last, each on its date. In the order asked for. */
export async function calibrationsOn(
  wanted: readonly { instrumentId: string; date: string }[],
): Promise<CalibrationState[]> {
  if (wanted.length === 0) return [];
  const found = await rows<CalibrationState>(
    // The instrument's own date is that of its latest calibration, or what somebody typed where none is on record.
    `SELECT CASE WHEN c.id IS NULL OR c.id = l.id THEN i.calibration_due_on ELSE c.due_on END::text AS "dueOn",
       CASE WHEN NOT c.has_passed THEN c.done_on::text END AS "failedOn"
     FROM jsonb_to_recordset($1::jsonb) AS x("instrumentId" uuid, date date, place int)
     LEFT JOIN instruments i ON i.id = x."instrumentId"
     LEFT JOIN LATERAL (SELECT * FROM instrument_calibrations t WHERE t.instrument_id = i.id AND t.done_on <= x.date
       ORDER BY t.done_on DESC, t.created_at DESC LIMIT 1) c ON TRUE
     LEFT JOIN LATERAL (SELECT t.id FROM instrument_calibrations t WHERE t.instrument_id = i.id
       ORDER BY t.done_on DESC, t.created_at DESC LIMIT 1) l ON TRUE
     ORDER BY x.place`,
    [JSON.stringify(wanted.map((one, place) => ({ ...one, place })))],
  );
  return found;
}

export async function calibrationOn(instrumentId: string, date: string): Promise<CalibrationState> {
  const [found] = await calibrationsOn([{ instrumentId, date }]);
  return found ?? { dueOn: null, failedOn: null };
}

type CalibrationRow = Omit<CalibrationView, "createdAt"> & { createdAt: Date; startOfDay: Date };

interface CheckedRun {
  runId: string;
  date: string;
  workerId: string | null;
  workerName: string | null;
  taskName: string | null;
  isVoid: boolean;
  keptReason: string | null;
  checkBeforeDb: number | null;
  checkAfterDb: number | null;
  /** When it was over; where only its length is known, the end of its day at the site. */
  endedAt: Date;
}

interface Good {
  at: Date;
  what: "calibration" | "field-check";
}

/**
 * An instrument's calibrations; and where the latest one failed, the runs since the last time that something showed it to
 * be right: a calibration it passed, or field checks within their tolerance at the end of a run.
 */
export async function calibrationHistory(
  actor: Actor,
  instrumentId: string,
): Promise<CalibrationHistory> {
  const found = await rows<CalibrationRow>(
    `SELECT c.id, c.done_on::text AS "doneOn", c.has_passed AS "hasPassed", c.found_error_db AS "foundErrorDb", c.due_on::text AS "dueOn",
       c.certificate_file_id AS "certificateFileId", c.note, u.name AS "authorName", c.created_at AS "createdAt",
       c.done_on::timestamp AT TIME ZONE s.time_zone AS "startOfDay"
     FROM instrument_calibrations c JOIN instruments i ON i.id = c.instrument_id JOIN sites s ON s.id = i.site_id
     LEFT JOIN users u ON u.id = c.author_id
     WHERE c.instrument_id = :instrumentId ORDER BY c.done_on DESC, c.created_at DESC`,
    { instrumentId },
  );
  const views = found.map(({ createdAt, startOfDay: _, ...one }) => ({
    ...one,
    createdAt: createdAt.toISOString(),
  }));
  const failed = found[0]?.hasPassed === false ? firstOfFailures(found) : null;
  const runs = await rows<CheckedRun>(
    `SELECT r.id AS "runId", r.date::text AS date, r.worker_id AS "workerId", w.name AS "workerName", t.name AS "taskName", r.is_void AS "isVoid",
       v.kept_reason AS "keptReason", v.check_before_db AS "checkBeforeDb", v.check_after_db AS "checkAfterDb",
       coalesce(upper(r.span), (r.date + 1)::timestamp AT TIME ZONE s.time_zone) AS "endedAt"
     FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id JOIN sites s ON s.id = r.site_id
     LEFT JOIN workers w ON w.id = r.worker_id LEFT JOIN tasks t ON t.id = r.task_id
     WHERE r.instrument_id = :instrumentId AND NOT r.is_out AND ${visible(runPolicy, actor, "r")}
     ORDER BY r.date DESC, r.id DESC`,
    { instrumentId },
  );
  const good = lastGood(found, runs, failed);
  const inDoubt = failed
    ? runs.filter((run) => !run.isVoid && (good === null || run.endedAt > good.at))
    : [];
  const counts = await countResults(inDoubt.map(({ runId }) => runId));
  return {
    rows: views,
    lastGoodCheckAt: good?.at.toISOString() ?? null,
    lastGoodCheck: good?.what ?? null,
    inDoubt: inDoubt.map((run) => ({
      runId: run.runId,
      date: run.date,
      workerId: run.workerId,
      workerName: run.workerName,
      taskName: run.taskName,
      isVoid: run.isVoid,
      keptReason: run.keptReason,
      resultsCount: counts.get(run.runId) ?? 0,
    })),
  };
}

/** The earliest of the failures that no calibration has followed: it may have failed a second time after a repair. */
function firstOfFailures(latestFirst: readonly CalibrationRow[]): CalibrationRow | null {
  const passed = latestFirst.findIndex(({ hasPassed }) => hasPassed);
  const failures = passed < 0 ? latestFirst : latestFirst.slice(0, passed);
  return failures.at(-1) ?? null;
}

function lastGood(
  calibrations: readonly CalibrationRow[],
  runs: readonly CheckedRun[],
  failed: CalibrationRow | null,
): Good | null {
  const checks: Good[] = [
    ...calibrations
      .filter(({ hasPassed }) => hasPassed)
      .map(({ startOfDay }): Good => ({ at: startOfDay, what: "calibration" })),
    ...runs
      .filter((run) => {
        const drift = fieldCheckDriftDb(run.checkBeforeDb, run.checkAfterDb);
        return !run.isVoid && drift !== null && isWithinTolerance(drift);
      })
      .map(({ endedAt }): Good => ({ at: endedAt, what: "field-check" })),
  ];
  const before = failed
    ? checks.filter(({ at }) => at <= new Date(failed.startOfDay.getTime() + DAY_MS))
    : checks;
  return before.reduce<Good | null>((last, one) => (last && last.at >= one.at ? last : one), null);
}

const DAY_MS = 86_400_000;

/** Days whose current result names a revision of the run, or a level that a sample of the run went into. */
async function countResults(runIds: readonly string[]): Promise<Map<string, number>> {
  if (runIds.length === 0) return new Map();
  const found = await rows<{ runId: string; count: number }>(
    `WITH asked AS (SELECT id, worker_id, date, site_id, organization_id FROM runs WHERE id = ANY ($1::uuid[])),
     own AS (
       SELECT a.id AS run_id, d.worker_id, d.date FROM asked a JOIN days d ON d.worker_id = a.worker_id AND d.date = a.date
       JOIN day_results x ON x.id = d.current_result_id JOIN run_revisions v ON v.run_id = a.id
       WHERE x.refs @> jsonb_build_object('shifts', jsonb_build_array(jsonb_build_object('runRevisionIds', jsonb_build_array(v.id))))),
     by_level AS (
       SELECT DISTINCT m.run_id, d.worker_id, d.date FROM task_level_samples m JOIN asked a ON a.id = m.run_id
       JOIN task_levels l ON l.id = m.task_level_id JOIN days d ON d.site_id = a.site_id AND d.date >= l.effective_from
       JOIN day_results x ON x.id = d.current_result_id
       WHERE x.refs @> jsonb_build_object('shifts', jsonb_build_array(jsonb_build_object('tasks', jsonb_build_array(jsonb_build_object('levelId', l.id))))))
     SELECT run_id AS "runId", count(*)::int AS count FROM (SELECT * FROM own UNION SELECT * FROM by_level) u GROUP BY run_id`,
    [runIds],
  );
  return new Map(found.map(({ runId, count }) => [runId, count]));
}
