import type { z } from "zod";
import type { TaskLevelView, TaskView } from "../../shared/schemas/task";
import { row, rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { programmePolicy } from "../policies";

type LevelView = z.infer<typeof TaskLevelView>;
export type TaskRow = Omit<TaskView, "can" | "level">;
export type TaskLevelRow = Omit<LevelView, "peak" | "createdAt"> & {
  taskId: string;
  isInForce: boolean;
  peakDb: number | null;
  peakWeighting: "A" | "C" | "Z" | null;
  createdAt: Date;
};

export async function listTasks(
  actor: Actor,
  { id = null, siteId = null }: { id?: string | null; siteId?: string | null },
): Promise<TaskRow[]> {
  return rows<TaskRow>(
    `SELECT t.id, t.site_id AS "siteId", t.area_id AS "areaId", t.name, t.required_gear AS "requiredGear", t.is_archived AS "isArchived", t.revision,
       a.name AS "areaName", coalesce(a.zone, 'none') AS zone
     FROM tasks t LEFT JOIN areas a ON a.id = t.area_id WHERE ${visible(programmePolicy, actor, "t")}
       AND (CAST(:id AS uuid) IS NULL OR t.id = :id) AND (CAST(:siteId AS uuid) IS NULL OR t.site_id = :siteId)
     ORDER BY t.is_archived, t.name, t.id`,
    { id, siteId },
  );
}

/** Levels of these tasks, the latest first: all, or only those in force on their site's today. */
export async function listTaskLevels(
  taskIds: readonly string[],
  which: "all" | "in-force",
): Promise<TaskLevelRow[]> {
  if (taskIds.length === 0) return [];
  return rows<TaskLevelRow>(
    `SELECT * FROM (
       SELECT l.id, l.task_id AS "taskId", l.number, l.effective_from::text AS "effectiveFrom", l.metric, l.level_db AS "levelDb",
         l.lc_minus_la_db AS "lcMinusLaDb", l.octave_bands_db AS "octaveBandsDb", l.las_max_db AS "lasMaxDb", l.peak_db AS "peakDb",
         l.peak_weighting AS "peakWeighting", l.samples_db AS "samplesDb", l.instrument_class AS instrument, l.grade,
         l.source_note AS "sourceNote", l.reason, u.name AS "authorName", l.created_at AS "createdAt",
         l.survey_id AS "surveyId", y.name AS "surveyName", l.recording_id AS "recordingId", c.file_name AS "recordingName", l.strategy, l.kept_reasons AS "keptReasons",
         l.impulse_type AS "impulseType", l.spectrum_of_number AS "spectrumOfNumber",
         coalesce((SELECT json_agg(json_build_object('runId', p.run_id, 'date', r.date::text, 'levelDb', p.level_db, 'fromS', p.from_s, 'toS', p.to_s)
           ORDER BY p.position) FROM task_level_samples p JOIN runs r ON r.id = p.run_id WHERE p.task_level_id = l.id), '[]') AS samples,
         l.id IS NOT DISTINCT FROM (
           SELECT f.id FROM task_levels f
           WHERE f.task_id = l.task_id AND f.effective_from <= (now() AT TIME ZONE s.time_zone)::date
           ORDER BY f.effective_from DESC, f.number DESC LIMIT 1) AS "isInForce"
       FROM task_levels l JOIN tasks t ON t.id = l.task_id JOIN sites s ON s.id = t.site_id LEFT JOIN users u ON u.id = l.author_id
         LEFT JOIN surveys y ON y.id = l.survey_id LEFT JOIN recordings c ON c.id = l.recording_id
       WHERE l.task_id IN (:taskIds)) level
     WHERE :all OR level."isInForce"
     ORDER BY level."effectiveFrom" DESC, level.number DESC`,
    { taskIds, all: which === "all" },
  );
}

/** The level of a task on a date, with each sample's run revision. */
export async function levelInForce(taskId: string, date: string) {
  type Own = Pick<
    TaskLevelRow,
    | "metric"
    | "levelDb"
    | "lasMaxDb"
    | "samplesDb"
    | "instrument"
    | "grade"
    | "sourceNote"
    | "surveyId"
    | "strategy"
    | "keptReasons"
  > & {
    peak: LevelView["peak"];
    samples: {
      runId: string;
      runRevisionId: string;
      fromS: number | null;
      toS: number | null;
      levelDb: number;
    }[];
  };
  return row<Own>(
    `SELECT l.metric, l.level_db AS "levelDb", l.las_max_db AS "lasMaxDb", l.samples_db AS "samplesDb", l.instrument_class AS instrument,
       l.grade, l.source_note AS "sourceNote", l.survey_id AS "surveyId", l.strategy, l.kept_reasons AS "keptReasons",
       CASE WHEN l.peak_db IS NOT NULL THEN json_build_object('levelDb', l.peak_db, 'weighting', l.peak_weighting) END AS peak,
       coalesce((SELECT json_agg(json_build_object('runId', p.run_id, 'runRevisionId', p.run_revision_id, 'levelDb', p.level_db, 'fromS', p.from_s, 'toS', p.to_s)
         ORDER BY p.position) FROM task_level_samples p WHERE p.task_level_id = l.id), '[]') AS samples
     FROM task_levels l WHERE l.task_id = :taskId AND l.effective_from <= CAST(:date AS date)
     ORDER BY l.effective_from DESC, l.number DESC LIMIT 1`,
    { taskId, date },
  );
}

/** How many shifts, as they stand, name the task. */
export async function countShiftsWithTask(taskId: string): Promise<number> {
  const found = await row<{ count: number }>(
    `SELECT count(*)::int AS count FROM shift_tasks t
     JOIN shifts s ON s.id = t.shift_id AND s.current_revision_id = t.shift_revision_id AND NOT s.is_void
     WHERE t.task_id = :taskId`,
    { taskId },
  );
  return found?.count ?? 0;
}
