import type { ObservedDuration } from "../../shared/schemas/survey";
import { rows } from "../lib/db";

const MONTHS = 3;

/**
 * Minutes of each task in the shifts that a job's workers really worked in the last three months, as they stand: over
 * the shifts that had the task, for one that lacks it says nothing about how long it takes.
 */
export async function observedDurations(jobId: string): Promise<Map<string, ObservedDuration>> {
  const found = await rows<ObservedDuration & { taskId: string }>(
    `WITH worked AS (
       SELECT s.id, s.current_revision_id FROM shifts s JOIN workers w ON w.id = s.worker_id
       WHERE w.job_id = :jobId AND NOT s.is_void AND s.date > current_date - make_interval(months => ${MONTHS})
         AND EXISTS (SELECT 1 FROM shift_tasks t WHERE t.shift_revision_id = s.current_revision_id)),
     had AS (
       SELECT t.shift_id, t.task_id, sum(t.duration_min) AS minutes FROM worked s
       JOIN shift_tasks t ON t.shift_revision_id = s.current_revision_id GROUP BY t.shift_id, t.task_id)
     SELECT task_id AS "taskId", count(*)::int AS count, avg(minutes) AS "meanMin", stddev_samp(minutes) AS "sdMin",
       (SELECT count(*)::int FROM worked) AS "shiftsCount"
     FROM had GROUP BY task_id`,
    { jobId },
  );
  return new Map(found.map(({ taskId, ...observed }) => [taskId, observed]));
}

/**
 * u1b of a task's duration, minutes: the standard deviation over the root of the number; 0 where nothing was observed,
 * which then is no part of the budget.
 */
export const durationUncertaintyMin = (observed: ObservedDuration | null | undefined): number =>
  observed?.sdMin == null ? 0 : observed.sdMin / Math.sqrt(observed.count);
