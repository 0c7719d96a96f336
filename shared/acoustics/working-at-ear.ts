import { governingReading, likenessFactor, unaccountedMin } from "./day-sum";
import { type ExchangeLaw, levelFactor, levelOfWeight, weightOf } from "./exchange-law";
import { poweredShare } from "./protection/active";
import {
  type DayAtEar,
  leastAtEar,
  mostAtEar,
  quietSum,
  scaleOf,
  steadyWeight,
} from "./protection/at-ear";
import {
  type AudioLaw,
  audioLaw,
  withAudioDb,
  withAudioWeight,
} from "./protection/programme-audio";
import { wornShareLevelDb } from "./protection/wearing-time";
import type {
  AttenuationMethod,
  DayEvaluation,
  DayInput,
  ShiftInput,
  TaskAtEar,
  TaskLevel,
  TimedTask,
} from "./types";
import type { Bound } from "./working-parts";

/** One task, or quiet time, of the day as it counts at the ear. */
export interface TimeAtEar {
  readonly id: string;
  readonly shiftIndex: number;
  /** Null for quiet time. */
  readonly task: TimedTask | null;
  readonly atEar: TaskAtEar | null;
  readonly minutes: number;
  /** What the reading makes of the tasks; 1 without one. */
  readonly scale: number;
  /** Without the protector, as it counts here, dB; null: below the threshold, or nothing of it is certain. */
  readonly bareDb: number | null;
  /** The same before the reading's factor, where that is part of the level here: with programme audio. Else the same. */
  readonly tasksDb: number | null;
  /** While worn, on the level that counts, dB. */
  readonly wornDb: number | null;
  readonly wornOnDb: number | null;
  /** What is left of the noise and the programme that is added to it; null without one. */
  readonly audio: {
    readonly levelDb: number;
    readonly noiseDb: number | null;
    readonly noiseOnDb: number | null;
    /** Added by energy, or as weights under the rule's exchange rate, which bounds the sum. */
    readonly isByEnergy: boolean;
  } | null;
  /** Share worn, 0 to 1; 1 where it is not known. */
  readonly worn: number;
  readonly offDb: number | null;
  readonly onDb: number | null;
  readonly isCredited: boolean;
  /** On which side the level outside stands, and those while worn and in the task. */
  readonly bareBound: Bound | null;
  readonly bound: Bound | null;
}

export interface ShiftAtEar {
  readonly readingSum: number | null;
  readonly tasksSum: number | null;
  /** Share of the worn time with the active part on; null where the battery is not stated. */
  readonly powered: number | null;
  readonly batteryMin: number | null;
  readonly activeWornMin: number;
}

/** Weights that ought to be one differ by less than this part of them. */
const BINARY_NOISE = 1e-9;

/** The day at the ear row by row, as the engine adds it up: T/T0 · 10^(L/k), k of the rule without its threshold. */
export class DayAtEarRows {
  readonly rows: readonly TimeAtEar[];
  readonly shifts: readonly ShiftAtEar[];
  readonly bound: Bound | null;
  readonly factor: number;
  /** The rule's law without its threshold. */
  readonly law: ExchangeLaw;

  constructor(
    day: DayInput,
    private readonly outsideLaw: ExchangeLaw,
    atEar: DayAtEar,
    bound: DayEvaluation["atEarBound"],
  ) {
    this.law = { ...outsideLaw, table: null, thresholdDb: null };
    this.factor = levelFactor(this.law);
    const { least, most } = atEar.off;
    this.bound = least === most || bound === "exact" ? null : bound;
    const isLeast = this.bound === "lower";
    const rows: TimeAtEar[] = [];
    const shifts: ShiftAtEar[] = [];
    for (const [shiftIndex, shift] of day.shifts.entries()) {
      rows.push(...this.rowsOf(shift, shiftIndex, day, atEar, isLeast));
      shifts.push(this.shiftOf(shift, day, atEar));
    }
    this.rows = rows;
    this.shifts = shifts;
  }

  private rowsOf(
    shift: ShiftInput,
    shiftIndex: number,
    day: DayInput,
    atEar: DayAtEar,
    isLeast: boolean,
  ): TimeAtEar[] {
    const { law } = this;
    const bareLaw: ExchangeLaw = { ...this.outsideLaw, table: null };
    const scale = scaleOf(shift, day, law, this.outsideLaw);
    const likeness = likenessFactor(shift);
    const rows: TimeAtEar[] = [];
    for (const task of shift.tasks) {
      const seen = atEar.tasks.find(({ timedTaskId }) => timedTaskId === task.id)!;
      if (task.level === null || task.durationMin === 0) continue;
      const lawHere = seen.isWorn ? law : bareLaw;
      const weight = scale.isByReading
        ? steadyWeight(task.level.levelDb, lawHere)
        : (isLeast ? leastAtEar : mostAtEar)(task.level, lawHere, this.outsideLaw);
      const isBounded = !scale.isByReading && this.isBounded(task.level, lawHere);
      const bareBound = isBounded ? this.bound : null;
      const tasksDb = weight > 0 ? levelOfWeight(weight, law) : null;
      const worn = seen.isWorn ? (task.wornPct ?? 100) / 100 : 0;
      const common = {
        id: task.id,
        shiftIndex,
        task,
        atEar: seen,
        minutes: task.durationMin * likeness,
        tasksDb,
        worn,
        isCredited: atEar.creditedTaskIds.has(task.id),
        bareBound,
        bound: bareBound,
      };
      rows.push(
        seen.audio
          ? {
              ...common,
              ...this.underAudio(
                task.level,
                seen,
                weight * scale.ofReading,
                worn,
                audioLaw(seen.audio.levelDb, task.level, law, scale.isByReading),
                isLeast,
              ),
            }
          : {
              ...common,
              ...this.underNoise(task.level, seen, tasksDb, worn),
              scale: scale.isByReading ? scale.factor / likeness : 1,
            },
      );
    }
    if (shift.unaccounted.how === "quiet" && unaccountedMin(shift) > 0) {
      const counts = quietSum(shift, bareLaw) > 0;
      const quietDb = counts ? shift.unaccounted.levelDb : null;
      rows.push({
        id: `${shift.id}-rest`,
        shiftIndex,
        task: null,
        atEar: null,
        minutes: unaccountedMin(shift),
        scale: scale.isByReading ? scale.factor : 1,
        bareDb: quietDb,
        tasksDb: quietDb,
        wornDb: null,
        wornOnDb: null,
        audio: null,
        worn: 0,
        offDb: quietDb,
        onDb: quietDb,
        isCredited: false,
        bareBound: null,
        bound: null,
      });
    }
    return rows;
  }

  /** A task's level only bounds the rule's own. */
  isBounded(level: TaskLevel, law = this.law): boolean {
    const least = leastAtEar(level, law, this.outsideLaw);
    return mostAtEar(level, law, this.outsideLaw) > least * (1 + BINARY_NOISE);
  }

  /** The level of a worn task that counts on one side, dB; null where none does, or nothing bounds it. */
  countedDb(level: TaskLevel, end: "least" | "most"): number | null {
    if (!this.isBounded(level)) return level.levelDb;
    const weight = (end === "least" ? leastAtEar : mostAtEar)(level, this.law, this.outsideLaw);
    if (weight === 0 || weight === Number.POSITIVE_INFINITY) return null;
    const db = levelOfWeight(weight, this.law);
    return Math.abs(db - level.levelDb) < BINARY_NOISE ? level.levelDb : db;
  }

  private underNoise(level: TaskLevel, seen: TaskAtEar, bareDb: number | null, worn: number) {
    const takenOffDb = seen.isWorn && seen.wornDb !== null ? level.levelDb - seen.wornDb : null;
    const takenOffOnDb = seen.wornActiveDb === null ? null : level.levelDb - seen.wornActiveDb;
    const left = (offDb: number | null): number | null =>
      bareDb === null || offDb === null ? null : bareDb - offDb;
    const inTask = (wornDb: number | null): number | null =>
      bareDb === null || wornDb === null
        ? bareDb
        : wornShareLevelDb(bareDb, wornDb, 100 * worn, this.factor);
    const wornDb = left(takenOffDb);
    const wornOnDb = left(takenOffOnDb);
    return {
      bareDb,
      wornDb,
      wornOnDb,
      audio: null,
      offDb: inTask(wornDb),
      onDb: inTask(wornOnDb ?? wornDb),
    };
  }

  /** With a programme the reading's factor is part of the noise's level, since it is not on the programme. */
  private underAudio(
    level: TaskLevel,
    seen: TaskAtEar,
    bareWeight: number,
    worn: number,
    audio: AudioLaw,
    isLeast: boolean,
  ) {
    const { law } = this;
    const { levelDb: audioDb, noiseDb, noiseActiveDb } = seen.audio!;
    const leftOf = (atEarDb: number): number => bareWeight * weightOf(atEarDb - level.levelDb, law);
    const whileWorn = (atEarDb: number): number =>
      withAudioWeight(leftOf(atEarDb), audio, isLeast ? "least" : "most");
    const inTask = (atEarDb: number): number =>
      levelOfWeight(worn * whileWorn(atEarDb) + (1 - worn) * bareWeight, law);
    const dbOrNull = (weight: number) => (weight > 0 ? levelOfWeight(weight, law) : null);
    return {
      bareDb: dbOrNull(bareWeight),
      wornDb: levelOfWeight(whileWorn(noiseDb), law),
      wornOnDb: noiseActiveDb === null ? null : levelOfWeight(whileWorn(noiseActiveDb), law),
      audio: {
        levelDb: audioDb,
        noiseDb: dbOrNull(leftOf(noiseDb)),
        noiseOnDb: noiseActiveDb === null ? null : dbOrNull(leftOf(noiseActiveDb)),
        isByEnergy: isLeast || audio.isUpperByEnergy,
      },
      offDb: inTask(noiseDb),
      onDb: inTask(noiseActiveDb ?? noiseDb),
      scale: 1,
      // Beside an average that is none by energy the sum with the programme is only bounded.
      ...(audio.isUpperByEnergy ? {} : { bound: this.bound }),
    };
  }

  private shiftOf(shift: ShiftInput, day: DayInput, atEar: DayAtEar): ShiftAtEar {
    const scale = scaleOf(shift, day, this.law, this.outsideLaw);
    const isByReading = governingReading(shift, this.outsideLaw) !== undefined;
    const active = shift.tasks.filter(
      ({ id }) =>
        (atEar.tasks.find(({ timedTaskId }) => timedTaskId === id)?.wornActiveDb ?? null) !== null,
    );
    const batteries = active.map(({ protection }) => protection?.inner.active?.batteryMin ?? null);
    const batteryMin = batteries.includes(null)
      ? null
      : Math.min(...batteries.map((min) => min ?? 0), Number.POSITIVE_INFINITY);
    const activeWornMin = active.reduce(
      (sum, { durationMin, wornPct }) => sum + (durationMin * (wornPct ?? 100)) / 100,
      0,
    );
    return {
      readingSum: isByReading ? scale.readingSum : null,
      tasksSum:
        isByReading && scale.factor > 0
          ? (likenessFactor(shift) * scale.readingSum) / scale.factor
          : null,
      powered: poweredShare(batteryMin, activeWornMin),
      batteryMin,
      activeWornMin,
    };
  }

  /** T/T0 · s · 10^(L/k) of a level in a row; nothing where none counts. */
  term(row: TimeAtEar, levelDb: number | null): number {
    return levelDb === null
      ? 0
      : (row.minutes / this.law.referenceMin) * row.scale * weightOf(levelDb, this.law);
  }

  /** Active part on while the battery lasts. */
  asWorkedTerm(row: TimeAtEar): number | null {
    const powered = this.shifts[row.shiftIndex]?.powered ?? null;
    return powered === null
      ? null
      : powered * this.term(row, row.onDb) + (1 - powered) * this.term(row, row.offDb);
  }

  private withAudio(noiseDb: number, { levelDb, isByEnergy }: NonNullable<TimeAtEar["audio"]>) {
    return isByEnergy
      ? withAudioDb(noiseDb, levelDb)
      : levelOfWeight(weightOf(noiseDb, this.law) + weightOf(levelDb, this.law), this.law);
  }

  levelOf(sum: number): number {
    return levelOfWeight(sum, this.law);
  }

  /** The day with one method alone on all tasks in which a protector is worn, dB. */
  byMethod(method: AttenuationMethod): number | null {
    let sum = 0;
    for (const row of this.rows) {
      const { atEar, task, bareDb, worn, audio } = row;
      if (!atEar?.isWorn || !task?.level || bareDb === null) {
        sum += this.term(row, row.offDb);
        continue;
      }
      const result = atEar.methods.find((one) => one.method === method);
      if (result?.atEarDb == null) return null;
      const leftDb = bareDb - (task.level.levelDb - result.atEarDb);
      const wornDb = audio === null ? leftDb : this.withAudio(leftDb, audio);
      sum += this.term(row, wornShareLevelDb(bareDb, wornDb, 100 * worn, this.factor));
    }
    return sum > 0 ? this.levelOf(sum) : null;
  }
}
