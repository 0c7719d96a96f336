import { buildDayInput } from "../../shared/day/build-day-input";
import { longestStay } from "../../shared/day/longest-stay";
import type { TaskTimes } from "../../shared/schemas/own-record";
import { todayAt } from "../lib/calendar";
import { row, rows } from "../lib/db";
import type { Worker } from "../models/worker";
import { usualContext } from "./expected-days";
import { rulesOn } from "./site-settings";

interface NominalTask {
  taskId: string;
  name: string;
  durationMin: number;
  /** When its level in force was measured; null: it was not, or what was measured is in doubt. */
  measuredOn: string | null;
}

/**
 * The tasks of a job's nominal day. A level is certain where samples stand behind it, none of them by an instrument that
 * failed its calibration since, nothing at the workplace has changed, and it is not older than the site allows.
 */
const NOMINAL = `SELECT t.id AS "taskId", t.name, n.duration_min AS "durationMin", CASE WHEN l.grade <> 'estimate' AND l.samples_db <> '{}'
      AND (s.remeasure_after_months IS NULL OR l.effective_from + make_interval(months => s.remeasure_after_months) > CAST(:date AS date))
      AND NOT EXISTS (SELECT 1 FROM workplace_changes c WHERE c.site_id = t.site_id AND c.struck_reason IS NULL AND c.happened_on > l.effective_from
        AND c.happened_on <= CAST(:date AS date) AND (c.task_id = t.id OR c.area_id = t.area_id OR c.job_id = n.job_id))
      AND NOT EXISTS (SELECT 1 FROM task_level_samples p JOIN runs r ON r.id = p.run_id JOIN run_revisions q ON q.id = r.current_revision_id
        WHERE p.task_level_id = l.id AND NOT r.is_void AND q.kept_reason IS NULL AND (SELECT NOT c.has_passed FROM instrument_calibrations c
          WHERE c.instrument_id = r.instrument_id ORDER BY c.done_on DESC, c.created_at DESC LIMIT 1)
          AND r.date >= coalesce((SELECT max(g.done_on) FROM instrument_calibrations g WHERE g.instrument_id = r.instrument_id AND g.has_passed), r.date))
    THEN coalesce((SELECT max(r.date) FROM task_level_samples p JOIN runs r ON r.id = p.run_id WHERE p.task_level_id = l.id), l.effective_from)::text END AS "measuredOn"
  FROM job_tasks n JOIN tasks t ON t.id = n.task_id JOIN sites s ON s.id = t.site_id
  LEFT JOIN LATERAL (SELECT x.* FROM task_levels x WHERE x.task_id = t.id AND x.effective_from <= CAST(:date AS date) ORDER BY x.effective_from DESC, x.number DESC LIMIT 1) l ON TRUE
  WHERE n.job_id = :jobId ORDER BY n.position`;

/**
 * How long each task of a worker's nominal day may last today, the rest of the day as usual. Nothing is said of anybody
 * whose day has a task of which the noise is not certain, nor while it is open where a bang came from, nor of whoever has a
 * target of their own: that is the officer's to tell.
 */
export async function taskTimes(worker: Worker): Promise<TaskTimes> {
  const none = { rows: [] };
  const place = await row<{
    timeZone: string;
    usualLengthMin: number | null;
    hasOpenPeak: boolean;
  }>(
    `SELECT s.time_zone AS "timeZone", (SELECT c.usual_length_min FROM crew_memberships m JOIN crews c ON c.id = m.crew_id
       WHERE m.worker_id = :id AND m.valid @> (now() AT TIME ZONE s.time_zone)::date ORDER BY m.is_loan DESC, lower(m.valid) DESC LIMIT 1) AS "usualLengthMin",
       EXISTS (SELECT 1 FROM findings f WHERE f.worker_id = :id AND f.kind = 'peak-or-ceiling' AND f.state NOT IN ('done', 'closed')) AS "hasOpenPeak"
     FROM sites s WHERE s.id = :siteId`,
    { id: worker.id, siteId: worker.siteId },
  );
  if (!place || worker.jobId === null || worker.personalTargetDb !== null) return none;
  if (place.hasOpenPeak) return none;
  const date = todayAt(place.timeZone);
  if (worker.leftOn !== null && worker.leftOn < date) return none;
  const nominal = await rows<NominalTask>(NOMINAL, { jobId: worker.jobId, date });
  const nominalMin = nominal.reduce((sum, { durationMin }) => sum + durationMin, 0);
  if (nominal.length === 0 || nominal.some(({ measuredOn }) => measuredOn === null)) return none;
  const settings = await rulesOn(worker.siteId, date);
  if (!settings) return none;

  const { assignments, worn, context } = await usualContext(
    worker.siteId,
    date,
    [worker.id],
    settings,
  );
  const wornPcts = worn.get(worker.id) ?? {};
  // As the Crew sheet expects it: what a shift is longer than its nominal day is like the rest.
  const shiftMin = Math.max(place.usualLengthMin ?? 0, nominalMin);
  const usual = nominal.map((task) => ({
    ...task,
    durationMin: (task.durationMin * shiftMin) / nominalMin,
  }));
  const dayWith = (taskId: string) => (minutes: number) => {
    const tasks = usual
      .map((task) => ({
        ...task,
        durationMin: task.taskId === taskId ? minutes : task.durationMin,
      }))
      .filter(({ durationMin }) => durationMin > 0);
    const lengthMin = tasks.reduce((sum, { durationMin }) => sum + durationMin, 0);
    const shift = {
      id: "today",
      lengthMin,
      tasks: tasks.map((task) => ({
        taskId: task.taskId,
        durationMin: task.durationMin,
        wornPct: wornPcts[task.taskId] ?? null,
        wornIsShiftWide: false,
      })),
      unaccounted: { how: "like-the-rest" } as const,
      readings: [],
    };
    return buildDayInput(worker, date, [shift], assignments, context);
  };
  return {
    rows: usual.flatMap(({ taskId, name, measuredOn }) => {
      const stay = longestStay(dayWith(taskId), taskId, settings.governing, shiftMin);
      if (!stay || stay.isMost || measuredOn === null) return [];
      const { allowedMin, isWorn } = stay;
      return [{ taskId, taskName: name, allowedMin, isWorn, measuredOn }];
    }),
  };
}
