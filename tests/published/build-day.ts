import type {
  DayInput,
  LevelMetric,
  MeterSettings,
  Protection,
  ProtectorData,
  ReadingInput,
  RuleSetVersion,
  ShiftInput,
  TaskLevel,
  TimedTask,
} from "../../shared/acoustics/types";
import { ruleSetVersion } from "../../shared/rule-sets";

/** The first version of a rule set, or a failed test. */
export function ruleSet(key: string): RuleSetVersion {
  const found = ruleSetVersion(key, 1);
  if (!found) throw new Error(`No rule set ${key}`);
  return found;
}

export const LAEQ: LevelMetric = { kind: "laeq" };
export const STEADY: LevelMetric = { kind: "steady" };

/** Average of an instrument at 5 dB, read on slow. */
export function lavg5(thresholdDb: number | null): LevelMetric {
  return { kind: "lavg", settings: settings(5, thresholdDb) };
}

export function settings(exchangeRateDb: number, thresholdDb: number | null): MeterSettings {
  return { criterionLevelDb: 90, exchangeRateDb, thresholdDb, weighting: "A", response: "slow" };
}

export function buildLevel(levelDb: number, fields: Partial<TaskLevel> = {}): TaskLevel {
  return {
    revisionId: null,
    metric: LAEQ,
    levelDb,
    lcMinusLaDb: null,
    octaveBandsDb: null,
    lasMaxDb: null,
    peak: null,
    samplesDb: [],
    instrument: null,
    grade: "task-level",
    ...fields,
  };
}

export function buildTask(
  id: string,
  durationMin: number,
  level: TaskLevel | null,
  fields: Partial<TimedTask> = {},
): TimedTask {
  return {
    id,
    taskId: id,
    name: id,
    durationMin,
    level,
    zone: "none",
    protection: null,
    wornPct: null,
    wornIsShiftWide: false,
    ...fields,
  };
}

export function buildShift(
  lengthMin: number,
  tasks: readonly TimedTask[],
  fields: Partial<ShiftInput> = {},
): ShiftInput {
  return {
    id: "shift",
    revisionId: null,
    lengthMin,
    tasks,
    unaccounted: { how: "unknown" },
    readings: [],
    ...fields,
  };
}

export function buildReading(
  readingSettings: MeterSettings,
  fields: Partial<ReadingInput> = {},
): ReadingInput {
  return {
    id: "reading",
    runId: "run",
    settings: readingSettings,
    durationMin: 480,
    dosePct: null,
    averageDb: null,
    lceqDb: null,
    lasMaxDb: null,
    peak: null,
    covers: "shift",
    instrument: "dosimeter",
    keptReason: null,
    ...fields,
  };
}

export function buildDay(
  shifts: readonly ShiftInput[],
  site: Partial<DayInput["site"]> = {},
  fields: Partial<DayInput> = {},
): DayInput {
  return {
    workerId: "worker",
    date: "2026-03-02",
    shifts,
    site: { wearFromDb: 85, creditsActivePart: false, usesUncertainty: false, ...site },
    personalTargetDb: null,
    mustWear: false,
    ...fields,
  };
}

/** One shift made of its tasks, nothing left over. */
export function dayOf(...tasks: TimedTask[]): DayInput {
  const lengthMin = tasks.reduce((sum, { durationMin }) => sum + durationMin, 0);
  return buildDay([buildShift(lengthMin, tasks)]);
}

export function buildProtector(fields: Partial<ProtectorData> = {}): ProtectorData {
  return {
    modelId: "plain-muff",
    revisionId: null,
    name: "Plain muff",
    kind: "earmuff",
    usRatingDb: null,
    snrDb: null,
    hDb: null,
    mDb: null,
    lDb: null,
    slc80Db: null,
    bands: null,
    active: null,
    ...fields,
  };
}

export function buildProtection(
  data: Partial<ProtectorData>,
  fields: Partial<Protection> = {},
): Protection {
  return {
    assignmentId: null,
    inner: buildProtector(data),
    outer: null,
    combinationBands: null,
    ownFitDb: null,
    activeCheckPassed: false,
    ...fields,
  };
}
