import {
  cutReading,
  governingReading,
  likenessFactor,
  missingTime,
  sumReading,
  unaccountedMin,
} from "./day-sum";
import { ENERGY_LAW, leastWeight, mostWeight } from "./exchange-law";
import type { DayInput, TaskLevel, TimedTask, UncertaintyReason } from "./types";
import {
  type BudgetPart,
  type DayUncertainty,
  INSTRUMENT_DB,
  jobSamplingContributionDb,
  jobSamplingUncertaintyDb,
  LEAST_JOB_SAMPLES,
  samplingUncertaintyDb,
  uncertaintyBudget,
} from "./uncertainty";

interface Source {
  readonly taskId: string | null;
  readonly level: TaskLevel | null;
  weight: number;
  durationMin: number;
  durationUncertaintyMin: number;
  readonly samplingDb: number | null;
  readonly instrumentDb: number;
}

/**
 * Uncertainty of a day's LEX,8h: task by task, or, where a reading of one day governs a shift, its instrument and
 * position only. One level used twice in a day is one source, whose errors add up and don't average out, so that
 * splitting a task changes nothing.
 *
 * Null with a reason where a task lacks what the standard asks for: two samples (three of a job or of full days) and an
 * instrument. Time said to be
 * quiet adds its energy; it was not measured, and the standard has no term for it.
 *
 * @source iso-9612-2009 C.2
 */
export function dayUncertainty(day: DayInput): DayUncertainty {
  if (day.shifts.length === 0) return none("no-tasks");
  const sources: Source[] = [];
  let totalWeight = 0;
  for (const shift of day.shifts) {
    const reading = governingReading(shift, ENERGY_LAW);
    if (reading) {
      const weight = sumReading(reading, shift, ENERGY_LAW);
      totalWeight += weight;
      sources.push({
        taskId: null,
        level: null,
        weight,
        durationMin: shift.lengthMin,
        durationUncertaintyMin: 0,
        samplingDb: null,
        instrumentDb: INSTRUMENT_DB[reading.instrument],
      });
      continue;
    }
    const missing = missingTime(shift) ?? (cutReading(shift, ENERGY_LAW) ? "time-unknown" : null);
    if (missing !== null) return none(missing);
    const factor = likenessFactor(shift);
    for (const task of shift.tasks) {
      if (task.durationMin === 0) continue;
      const reason = addTask(sources, task, factor);
      if (reason !== null) return none(reason);
      totalWeight += task.durationMin * factor * 10 ** (task.level!.levelDb / 10);
    }
    if (shift.unaccounted.how === "quiet") {
      totalWeight += unaccountedMin(shift) * 10 ** (shift.unaccounted.levelDb / 10);
    }
  }
  if (sources.length === 0) return none("no-tasks");
  const parts: BudgetPart[] = sources.map(({ weight, level, taskId, ...part }) => ({
    ...part,
    taskId,
    energyShare: weight / totalWeight,
  }));
  return { budget: uncertaintyBudget(parts), parts, reason: null };
}

function addTask(sources: Source[], task: TimedTask, factor: number): UncertaintyReason | null {
  const { level } = task;
  if (level === null) return "level-missing";
  const weightPerMin = leastWeight(level.metric, level.levelDb, ENERGY_LAW);
  if (weightPerMin !== mostWeight(level.metric, level.levelDb, ENERGY_LAW)) {
    return "not-an-energy-level";
  }
  const durationMin = task.durationMin * factor;
  const durationUncertaintyMin = (task.durationUncertaintyMin ?? 0) * factor;
  const same = sources.find((source) => isSameSource(source, task, level));
  if (same) {
    same.weight += durationMin * weightPerMin;
    same.durationMin += durationMin;
    same.durationUncertaintyMin += durationUncertaintyMin;
    return null;
  }
  const samplingDb = levelSamplingDb(level);
  if (samplingDb === null) return "too-few-samples";
  if (level.instrument === null) return "no-instrument";
  sources.push({
    taskId: task.taskId,
    level,
    weight: durationMin * weightPerMin,
    durationMin,
    durationUncertaintyMin,
    samplingDb,
    instrumentDb: INSTRUMENT_DB[level.instrument],
  });
  return null;
}

/**
 * The sampling part of a level: u1a of a task's samples, or the contribution c1·u1 of a job's or of full days, which is
 * not defined below three samples.
 *
 * @source iso-9612-2009 C.2.2, C.3.2
 */
function levelSamplingDb({ samplesDb, strategy = "task" }: TaskLevel): number | null {
  if (strategy === "task") return samplingUncertaintyDb(samplesDb);
  if (samplesDb.length < LEAST_JOB_SAMPLES) return null;
  return jobSamplingContributionDb(samplesDb.length, jobSamplingUncertaintyDb(samplesDb));
}

function isSameSource(source: Source, task: TimedTask, level: TaskLevel): boolean {
  if (source.level === null || source.taskId !== task.taskId) return false;
  if (source.level === level) return true;
  return (
    source.level.revisionId === level.revisionId &&
    source.level.levelDb === level.levelDb &&
    (source.level.strategy ?? "task") === (level.strategy ?? "task") &&
    source.level.instrument === level.instrument &&
    source.level.samplesDb.length === level.samplesDb.length &&
    source.level.samplesDb.every((sampleDb, index) => sampleDb === level.samplesDb[index])
  );
}

function none(reason: UncertaintyReason): DayUncertainty {
  return { budget: null, parts: [], reason };
}
