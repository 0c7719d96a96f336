import type { OutingBoard, OutingRow } from "../../shared/schemas/outing";
import { LEAST_SAMPLE_MIN } from "../../shared/schemas/run-doubts";
import { leastSampleMin, type Strategy, type SurveyTarget } from "../../shared/schemas/survey";
import { row, rows } from "../lib/db";
import { isoInstant } from "../lib/sql-instant";
import { FAILED_ON } from "./calibrations";

/**
 * Out and back at a site on a day: an instrument a row, with the run it is out on since that day or an earlier one, or
 * else its last run of the day.
 * Still out comes first, then what a survey has reserved for the day, then the rest by serial number.
 */
export async function outingRows(siteId: string, date: string): Promise<OutingRow[]> {
  return rows<OutingRow>(
    `SELECT i.id AS "instrumentId", i.name, i.serial_number AS "serialNumber", i.kind, i.class, i.calibration_due_on::text AS "calibrationDueOn",
       ${FAILED_ON("i.id")} AS "calibrationFailedOn", i.presets,
       (SELECT json_build_object('surveyId', y.id, 'surveyName', y.name) FROM instrument_reservations v JOIN surveys y ON y.id = v.survey_id
        WHERE v.instrument_id = i.id AND v.valid @> CAST(:date AS date) AND y.state <> 'struck' LIMIT 1) AS "reservedFor",
       CASE WHEN r.id IS NOT NULL THEN json_build_object('id', r.id, 'revision', r.revision, 'isOut', r.is_out, 'workerId', r.worker_id,
         'workerName', w.name, 'employeeNumber', w.employee_number, 'areaName', a.name, 'surveyId', r.survey_id, 'date', r.date::text,
         'outAt', ${isoInstant("lower(r.span)")}, 'backAt', ${isoInstant("upper(r.span)")}, 'expectedBackAt', ${isoInstant("x.ends_at")},
         'checkBeforeDb', q.check_before_db, 'checkAfterDb', q.check_after_db, 'isVoid', r.is_void, 'doubts', to_json(q.doubts),
         'keptReason', q.kept_reason, 'authorName', u.name,
         'readingsCount', (SELECT count(*)::int FROM readings g WHERE g.run_revision_id = q.id),
         'historyId', (SELECT h.id FROM time_histories h WHERE h.run_id = r.id AND NOT h.is_void)) END AS run
     FROM instruments i
     LEFT JOIN LATERAL (
       SELECT * FROM runs t WHERE t.instrument_id = i.id AND t.span IS NOT NULL AND t.task_id IS NULL
         AND (t.is_out AND NOT t.is_void AND t.date <= CAST(:date AS date) OR t.date = CAST(:date AS date) AND NOT (t.is_void AND t.is_out))
       ORDER BY t.is_out AND NOT t.is_void DESC, lower(t.span) DESC LIMIT 1) r ON TRUE
     LEFT JOIN run_revisions q ON q.id = r.current_revision_id
     LEFT JOIN workers w ON w.id = r.worker_id LEFT JOIN areas a ON a.id = r.area_id LEFT JOIN users u ON u.id = q.author_id
     LEFT JOIN LATERAL (
       SELECT coalesce(
         (SELECT max(h.ends_at) FROM shifts h WHERE h.worker_id = r.worker_id AND h.date = r.date AND NOT h.is_void),
         (SELECT ((r.date + c.usual_start) AT TIME ZONE s.time_zone) + make_interval(mins => c.usual_length_min)
          FROM crew_memberships m JOIN crews c ON c.id = m.crew_id JOIN sites s ON s.id = c.site_id
          WHERE m.worker_id = r.worker_id AND m.valid @> r.date LIMIT 1)) AS ends_at) x ON TRUE
     WHERE i.site_id = :siteId AND NOT i.is_archived AND i.kind <> 'calibrator'
     ORDER BY coalesce(r.is_out AND NOT r.is_void, FALSE) DESC,
       EXISTS (SELECT 1 FROM instrument_reservations v JOIN surveys y ON y.id = v.survey_id
         WHERE v.instrument_id = i.id AND v.valid @> CAST(:date AS date) AND y.state <> 'struck') DESC,
       i.serial_number`,
    { siteId, date },
  );
}

export async function outingBoard(
  site: { id: string; timeZone: string },
  date: string,
  can: OutingBoard["can"],
): Promise<OutingBoard> {
  return {
    siteId: site.id,
    timeZone: site.timeZone,
    date,
    rows: await outingRows(site.id, date),
    can,
  };
}

/** Who has an instrument out, since when and with whom, to tell whoever sends it out a second time; null: nobody. */
export async function whereabouts(instrumentId: string): Promise<{
  runId: string;
  outAt: string;
  withName: string;
  authorName: string;
} | null> {
  return row(
    `SELECT r.id AS "runId", ${isoInstant("lower(r.span)")} AS "outAt", coalesce(w.name, a.name, '') AS "withName", coalesce(u.name, '') AS "authorName"
     FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id LEFT JOIN users u ON u.id = v.author_id
     LEFT JOIN workers w ON w.id = r.worker_id LEFT JOIN areas a ON a.id = r.area_id
     WHERE r.instrument_id = :instrumentId AND r.is_out AND NOT r.is_void`,
    { instrumentId },
  );
}

/**
 * Minutes that a run has to last: as long as its survey planned for the task, or for the job as a whole, and never less
 * than the standard asks; a sample of a task that no survey planned as long as the standard asks of any. Null: nothing
 * is asked.
 */
export async function leastRunMin({
  surveyId = null,
  taskId = null,
}: {
  surveyId?: string | null;
  taskId?: string | null;
}): Promise<number | null> {
  const target = surveyId
    ? await row<
        Omit<SurveyTarget, "taskId"> & {
          strategy: Strategy;
          nominalMin: number | null;
          groupSize: number;
        }
      >(
        `SELECT t.sample_min AS "sampleMin", t.samples_count AS "samplesCount", t.pattern, t.cycle_min AS "cycleMin", y.strategy,
           (SELECT sum(n.duration_min)::float8 FROM job_tasks n WHERE n.job_id = y.job_id AND n.task_id = t.task_id) AS "nominalMin",
           (SELECT count(*)::int FROM workers w WHERE w.job_id = y.job_id AND (w.left_on IS NULL OR w.left_on >= current_date)) AS "groupSize"
         FROM survey_targets t JOIN surveys y ON y.id = t.survey_id
         WHERE t.survey_id = :surveyId AND t.task_id IS NOT DISTINCT FROM CAST(:taskId AS uuid) ORDER BY t.position LIMIT 1`,
        { surveyId, taskId },
      )
    : null;
  if (!target) return taskId === null ? null : LEAST_SAMPLE_MIN;
  const { strategy, nominalMin, groupSize, ...planned } = target;
  return leastSampleMin(strategy, planned, nominalMin, groupSize);
}
