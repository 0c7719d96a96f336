import { randomBytes } from "node:crypto";
import type { z } from "zod";
import {
  drawWorkers,
  planFullDaySampling,
  planJobSampling,
  planTaskSampling,
  preselectStrategy,
  type SamplingPlan,
  workPattern,
} from "../../shared/acoustics/survey-plan";
import type { ObservedDuration, SurveyPlan, SurveyPlanQuery } from "../../shared/schemas/survey";
import { rows } from "../lib/db";
import type { Job } from "../models/task";
import { FAILED_ON } from "./calibrations";
import { observedDurations } from "./observed-durations";

/** Of a working day whose nominal tasks nobody has named. */
const USUAL_SHIFT_MIN = 480;
/** From this spread of its minutes on, a task's duration counts as one that can't be foreseen. No source: a half. */
const UNPREDICTABLE_SHARE = 0.5;

export interface NominalTask {
  taskId: string;
  taskName: string;
  areaId: string | null;
  durationMin: number;
}

export async function nominalDay(jobId: string): Promise<NominalTask[]> {
  return rows<NominalTask>(
    `SELECT t.id AS "taskId", t.name AS "taskName", t.area_id AS "areaId", n.duration_min AS "durationMin"
     FROM job_tasks n JOIN tasks t ON t.id = n.task_id WHERE n.job_id = :jobId ORDER BY n.position`,
    { jobId },
  );
}

/** Minutes of a nominal day; a day that has none is taken as one of eight hours. */
export const shiftMinOf = (day: readonly { durationMin: number }[]): number =>
  day.reduce((sum, { durationMin }) => sum + durationMin, 0) || USUAL_SHIFT_MIN;

/** The instruments of a site that a survey can reserve, with what has reserved them from today on. */
async function instrumentsToReserve(siteId: string): Promise<SurveyPlan["instruments"]> {
  return rows(
    `SELECT i.id, i.name, i.serial_number AS "serialNumber", i.kind, i.class, i.calibration_due_on::text AS "calibrationDueOn",
       ${FAILED_ON("i.id")} AS "calibrationFailedOn", coalesce((SELECT json_agg(json_build_object('surveyId', y.id, 'surveyName', y.name, 'fromDate', lower(v.valid)::text,
           'toDate', (upper(v.valid) - 1)::text) ORDER BY lower(v.valid))
         FROM instrument_reservations v JOIN surveys y ON y.id = v.survey_id
         WHERE v.instrument_id = i.id AND upper(v.valid) > current_date AND y.state <> 'struck'), '[]') AS "reservedBy"
     FROM instruments i WHERE i.site_id = :siteId AND NOT i.is_archived AND i.kind <> 'calibrator'
     ORDER BY i.class, i.kind DESC, i.serial_number`,
    { siteId },
  );
}

function workPatternOf(
  day: readonly NominalTask[],
  observed: ReadonlyMap<string, ObservedDuration>,
): ReturnType<typeof workPattern> {
  const spreads = day.flatMap(({ taskId }) => {
    const { meanMin, sdMin } = observed.get(taskId) ?? { meanMin: 0, sdMin: null };
    return sdMin === null || meanMin === 0 ? [] : [sdMin / meanMin];
  });
  return workPattern({
    taskCount: day.length,
    isMobile: new Set(day.map(({ areaId }) => areaId)).size > 1,
    hasDurations: day.every(({ durationMin }) => durationMin > 0),
    // Most tasks, not each: a short one that varies does not make a day unforeseeable.
    isPredictable:
      spreads.filter((spread) => spread > UNPREDICTABLE_SHARE).length <= spreads.length / 2,
  });
}

/** What the standard asks of a survey of a group, filled in as far as it can be. Nothing is stored. */
export async function planSurvey(
  job: Job,
  query: z.output<typeof SurveyPlanQuery>,
): Promise<SurveyPlan> {
  const day = await nominalDay(job.id);
  const observed = await observedDurations(job.id);
  const people = await rows<{ workerId: string; name: string; employeeNumber: string }>(
    `SELECT id AS "workerId", name, employee_number AS "employeeNumber" FROM workers
     WHERE job_id = :jobId AND (left_on IS NULL OR left_on >= current_date) ORDER BY id`,
    { jobId: job.id },
  );
  const choice = preselectStrategy(workPatternOf(day, observed));
  const strategy = query.strategy ?? choice.strategy;
  const groupSize = people.length;
  const shiftMin = shiftMinOf(day);
  const ofWhole = (plan: SamplingPlan) => ({
    taskId: null,
    taskName: null,
    samplesCount: plan.sampleCount,
    sampleMin: plan.sampleMin,
    // Nobody has said yet how its noise runs: the form asks.
    pattern: "steady" as const,
    cycleMin: null,
    nominalMin: shiftMin,
    observed: null,
    reasons: [...plan.reasons],
  });
  const targets: SurveyPlan["targets"] =
    strategy === "task"
      ? day.map(({ taskId, taskName, durationMin }) => {
          const plan = planTaskSampling({
            durationMin,
            pattern: "steady",
            cycleMin: null,
            samplesDb: [],
          });
          return {
            ...ofWhole(plan),
            taskId,
            taskName,
            nominalMin: durationMin,
            observed: observed.get(taskId) ?? null,
          };
        })
      : strategy === "job"
        ? [ofWhole(planJobSampling({ groupSize: Math.max(1, groupSize), shiftMin, samplesDb: [] }))]
        : [ofWhole(planFullDaySampling({ shiftMin, samplesDb: [] }))];
  const seed = query.seed ?? randomBytes(6).toString("hex");
  const wanted = Math.max(1, ...targets.map(({ samplesCount }) => samplesCount));
  const draw = drawWorkers(
    people.map(({ workerId }) => workerId),
    wanted,
    seed,
  );
  const personOf = new Map(people.map((person) => [person.workerId, person]));
  const asPerson = (part: "drawn" | "reserve") => (workerId: string) => ({
    ...personOf.get(workerId)!,
    part,
  });
  return {
    strategy,
    proposedStrategy: choice.strategy,
    strategyReason: choice.reason,
    strategyClause: choice.clause,
    seed,
    groupSize,
    targets,
    people: [...draw.drawn.map(asPerson("drawn")), ...draw.reserve.map(asPerson("reserve"))],
    instruments: await instrumentsToReserve(job.siteId),
  };
}
