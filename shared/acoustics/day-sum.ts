import {
  type ExchangeLaw,
  isLaeq,
  isOwnSetting,
  leastWeight,
  mostWeight,
  servesExactly,
  weightOf,
} from "./exchange-law";
import type {
  CriterionResult,
  DayInput,
  LevelMetric,
  ReadingInput,
  Reason,
  ShiftInput,
} from "./types";

/** Less than this of a shift is the machine's noise and not time. */
const NO_TIME_MIN = 1e-9;

/** Minutes times weight under a law: what is certain, what is possible, and what stands between for want of a record. */
export interface Sum {
  readonly least: number;
  readonly most: number;
  readonly missing: Reason | null;
}

export interface DaySum extends Sum {
  readonly basis: CriterionResult["basis"];
  /** Some shift rests on a reading under the law's own settings. */
  readonly hasReading: boolean;
  /** The tasks alone, beside the readings. */
  readonly tasks: Sum;
}

export function accountedMin(shift: ShiftInput): number {
  let sum = 0;
  for (const task of shift.tasks) sum += task.durationMin;
  return sum;
}

/** Time of a shift that no task says anything about, minutes. */
export function unaccountedMin(shift: ShiftInput): number {
  const rest = shift.lengthMin - accountedMin(shift);
  return rest > NO_TIME_MIN ? rest : 0;
}

/** By how much the tasks stand for more time than their own: the rest was like them. */
export function likenessFactor(shift: ShiftInput): number {
  if (shift.unaccounted.how !== "like-the-rest") return 1;
  const accounted = accountedMin(shift);
  return accounted > 0 && shift.lengthMin > accounted ? shift.lengthMin / accounted : 1;
}

/** Why a shift's time is not wholly known; null where it is. */
export function missingTime(shift: ShiftInput): "no-tasks" | "time-unknown" | null {
  const { how } = shift.unaccounted;
  if (how === "quiet" || unaccountedMin(shift) === 0) return null;
  if (accountedMin(shift) === 0) return "no-tasks";
  return how === "unknown" ? "time-unknown" : null;
}

/** The tasks of a shift, under a law. */
export function sumTasks(shift: ShiftInput, law: ExchangeLaw): Sum {
  let least = 0;
  let most = 0;
  let missing: Reason | null = missingTime(shift);
  for (const { durationMin, level } of shift.tasks) {
    if (durationMin === 0) continue;
    if (level === null) {
      missing ??= "level-missing";
      continue;
    }
    const { metric, levelDb } = level;
    const atLeast = leastWeight(metric, levelDb, law);
    least += durationMin * atLeast;
    most += durationMin * (servesExactly(metric, law) ? atLeast : mostWeight(metric, levelDb, law));
  }
  const factor = likenessFactor(shift);
  least *= factor;
  most *= factor;
  if (shift.unaccounted.how === "quiet") {
    const quiet =
      unaccountedMin(shift) * leastWeight({ kind: "steady" }, shift.unaccounted.levelDb, law);
    least += quiet;
    most += quiet;
  }
  return { least, most: missing === null ? most : Number.POSITIVE_INFINITY, missing };
}

/** A reading speaks for the shift, except that nobody knows how a part left out of it was. */
export const isCutShort = ({ covers, leftOut }: ReadingInput): boolean =>
  covers !== "part" && leftOut?.how === "unknown" && leftOut.minutes > NO_TIME_MIN;

/** The reading that governs a shift under a law: under its own settings, and over the shift or projected to it. */
export function governingReading(shift: ShiftInput, law: ExchangeLaw): ReadingInput | undefined {
  return bestReading(shift, law, false);
}

/** The reading that would govern a shift under a law if it were known how the time left out of it was. */
export function cutReading(shift: ShiftInput, law: ExchangeLaw): ReadingInput | undefined {
  return governingReading(shift, law) ? undefined : bestReading(shift, law, true);
}

function bestReading(
  shift: ShiftInput,
  law: ExchangeLaw,
  isCut: boolean,
): ReadingInput | undefined {
  let best: ReadingInput | undefined;
  for (const reading of shift.readings) {
    if (reading.covers === "part" || !isOwnSetting(reading.settings, law)) continue;
    if (reading.dosePct === null && reading.averageDb === null) continue;
    if (isCutShort(reading) !== isCut) continue;
    if (!best || isBetter(reading, best)) best = reading;
  }
  return best;
}

function isBetter(reading: ReadingInput, other: ReadingInput): boolean {
  if (reading.covers !== other.covers) return reading.covers === "shift";
  return reading.durationMin > other.durationMin;
}

/** What a reading under the law's own settings adds up to over its shift. */
export function sumReading(reading: ReadingInput, shift: ShiftInput, law: ExchangeLaw): number {
  const { dosePct, averageDb, settings, durationMin } = reading;
  // Relative to the criterion level where a table is the rule, as are the table's own weights.
  const zeroDb = law.table ? law.criterionLevelDb : 0;
  const fromDose =
    dosePct === null
      ? null
      : (dosePct / 100) * 480 * weightOf(settings.criterionLevelDb - zeroDb, law);
  const fromAverage = averageDb === null ? null : durationMin * weightOf(averageDb - zeroDb, law);
  // The number that the law is written in comes first: a level for an energy law, a dose for the others.
  const sum = law.isEnergy ? (fromAverage ?? fromDose) : (fromDose ?? fromAverage);
  return sum! * projection(reading, shift) + leftOutQuiet(reading, shift, law);
}

/** By how much what a reading holds stands for more time than its own: the officer says that the rest was like it. */
export function projection(
  { covers, durationMin, leftOut }: ReadingInput,
  { lengthMin }: ShiftInput,
): number {
  if (covers === "part") return 1;
  const leftOutMin = leftOut?.minutes ?? 0;
  if (leftOut?.how === "like-the-rest" && covers === "shift")
    return (durationMin + leftOutMin) / durationMin;
  if (covers === "shift") return 1;
  const likeItMin =
    leftOut === undefined || leftOut.how === "like-the-rest"
      ? lengthMin
      : Math.max(0, lengthMin - leftOutMin);
  return likeItMin / durationMin;
}

/** The result rests on a likeness that the officer states, and not on the reading alone. */
export const isProjected = ({ covers, leftOut }: ReadingInput): boolean =>
  covers === "projected" ||
  (covers === "shift" && leftOut?.how === "like-the-rest" && leftOut.minutes > NO_TIME_MIN);

/** Time left out that the officer says was quiet, minutes; 0 where it was not. */
export function leftOutQuietMin({ covers, leftOut }: ReadingInput, shift: ShiftInput): number {
  if (covers === "part" || leftOut?.how !== "quiet") return 0;
  return covers === "projected" ? Math.min(leftOut.minutes, shift.lengthMin) : leftOut.minutes;
}

function leftOutQuiet(reading: ReadingInput, shift: ShiftInput, law: ExchangeLaw): number {
  const { leftOut } = reading;
  if (leftOut?.how !== "quiet") return 0;
  const weight = leastWeight({ kind: "steady" }, leftOut.levelDb, law);
  return leftOutQuietMin(reading, shift) * weight;
}

/** What a reading under other settings than the law's says about its shift; `atMost` null: it covers only a part. */
export interface ReadingBounds {
  readonly reading: ReadingInput;
  readonly metric: LevelMetric;
  readonly averageDb: number;
  /** Projected to the shift where the officer says so. */
  readonly minutes: number;
  readonly atLeast: number;
  readonly atMost: number | null;
}

export function boundsOfReadings(shift: ShiftInput, law: ExchangeLaw): ReadingBounds[] {
  const found: ReadingBounds[] = [];
  for (const reading of shift.readings) {
    const averageDb = reading.averageDb ?? averageOfDose(reading);
    if (averageDb === null || reading.settings.weighting !== "A") continue;
    const minutes = reading.durationMin * projection(reading, shift);
    const metric = isLaeq(reading.settings)
      ? ({ kind: "laeq" } as const)
      : ({ kind: "lavg", settings: reading.settings } as const);
    const quiet = leftOutQuiet(reading, shift, law);
    const isOpen = reading.covers === "part" || isCutShort(reading);
    found.push({
      reading,
      metric,
      averageDb,
      minutes,
      atLeast: minutes * leastWeight(metric, averageDb, law) + quiet,
      atMost: isOpen ? null : minutes * mostWeight(metric, averageDb, law) + quiet,
    });
  }
  return found;
}

/** What a shift's readings under other settings prove, where the tasks leave the matter open. */
function narrow(tasks: Sum, shift: ShiftInput, law: ExchangeLaw): Sum {
  const readings = boundsTogether(boundsOfReadings(shift, law));
  const least = Math.max(tasks.least, readings.least);
  const most = Math.min(tasks.most, readings.most);
  // Where tasks and readings contradict each other, the worker's own reading is believed, as far as it goes.
  if (least > most) return { ...readings, missing: null };
  return { least, most, missing: readings.most < tasks.most ? null : tasks.missing };
}

/** What several readings leave possible: what all allow or, where they contradict each other, what any of them does. */
function boundsTogether(bounds: readonly ReadingBounds[]): Pick<Sum, "least" | "most"> {
  const leasts = bounds.map(({ atLeast }) => atLeast);
  const mosts = bounds.map(({ atMost }) => atMost ?? Number.POSITIVE_INFINITY);
  const least = Math.max(0, ...leasts);
  const most = Math.min(Number.POSITIVE_INFINITY, ...mosts);
  return least <= most ? { least, most } : { least: Math.min(...leasts), most: Math.max(...mosts) };
}

/**
 * The tasks of a shift without a governing reading, with what its other readings prove about them. Where the reading
 * that would govern leaves out time that nobody speaks for, it and the tasks may prove Over, and nothing proves Under.
 */
export function narrowed(tasks: Sum, shift: ShiftInput, law: ExchangeLaw): Sum {
  const isOpen = shift.readings.length > 0 && tasks.least < tasks.most;
  const sum = isOpen ? narrow(tasks, shift, law) : tasks;
  const cut = cutReading(shift, law);
  if (!cut) return sum;
  const least = Math.max(sum.least, sumReading(cut, shift, law));
  return { least, most: Number.POSITIVE_INFINITY, missing: "time-unknown" };
}

/** LAVG that a dose stands for over the reading's run time, dB; null for no dose at all. */
function averageOfDose({ dosePct, settings, durationMin }: ReadingInput): number | null {
  if (dosePct === null || dosePct === 0) return null;
  const meanDose = (dosePct / 100) * (480 / durationMin);
  const factor = isLaeq(settings) ? 10 : settings.exchangeRateDb / Math.log10(2);
  return settings.criterionLevelDb + factor * Math.log10(meanDose);
}

/** A worker's whole day under a law, all shifts added up. */
export function sumDay(day: DayInput, law: ExchangeLaw): DaySum {
  let least = 0;
  let most = 0;
  let tasksLeast = 0;
  let tasksMost = 0;
  let missing: Reason | null = day.shifts.length === 0 ? "no-tasks" : null;
  let tasksMissing: Reason | null = missing;
  let readings = 0;
  let projected = 0;
  for (const shift of day.shifts) {
    const tasks = sumTasks(shift, law);
    tasksLeast += tasks.least;
    tasksMost += tasks.most;
    tasksMissing ??= tasks.missing;
    const reading = shift.readings.length > 0 ? governingReading(shift, law) : undefined;
    if (reading) {
      const sum = sumReading(reading, shift, law);
      least += sum;
      most += sum;
      readings++;
      if (isProjected(reading)) projected++;
      continue;
    }
    const shiftSum = narrowed(tasks, shift, law);
    least += shiftSum.least;
    most += shiftSum.most;
    missing ??= shiftSum.missing;
  }
  return {
    least,
    most: day.shifts.length === 0 ? Number.POSITIVE_INFINITY : most,
    missing,
    basis:
      readings === 0 || readings < day.shifts.length
        ? "tasks"
        : projected > 0
          ? "projected-reading"
          : "reading",
    hasReading: readings > 0,
    tasks: { least: tasksLeast, most: tasksMost, missing: tasksMissing },
  };
}
