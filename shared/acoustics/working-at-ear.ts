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
import { wornShareLevelDb } from "./protection/wearing-time";
import type {
  AttenuationMethod,
  DayEvaluation,
  DayInput,
  ShiftInput,
  TaskAtEar,
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
  /** While worn, on the level that counts, dB. */
  readonly wornDb: number | null;
  /** Share worn, 0 to 1; 1 where it is not known. */
  readonly worn: number;
  readonly offDb: number | null;
  readonly onDb: number | null;
  readonly isCredited: boolean;
}

export interface ShiftAtEar {
  readonly readingSum: number | null;
  readonly tasksSum: number | null;
  /** Share of the worn time with the active part on; null where the battery is not stated. */
  readonly powered: number | null;
  readonly batteryMin: number | null;
  readonly activeWornMin: number;
}

/** The day at the ear row by row, as the engine adds it up: T/T0 · 10^(L/k), k of the rule without its threshold. */
export class DayAtEarRows {
  readonly rows: readonly TimeAtEar[];
  readonly shifts: readonly ShiftAtEar[];
  readonly bound: Bound | null;
  readonly factor: number;
  private readonly law: ExchangeLaw;

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
    const { law, factor } = this;
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
      const bareDb = weight > 0 ? levelOfWeight(weight, law) : null;
      const takenOffDb =
        seen.isWorn && seen.wornDb !== null ? task.level.levelDb - seen.wornDb : null;
      const worn = seen.isWorn ? (task.wornPct ?? 100) / 100 : 0;
      const under = (offDb: number | null): number | null =>
        bareDb === null || offDb === null
          ? bareDb
          : wornShareLevelDb(bareDb, bareDb - offDb, 100 * worn, factor);
      rows.push({
        id: task.id,
        shiftIndex,
        task,
        atEar: seen,
        minutes: task.durationMin * likeness,
        scale: scale.isByReading ? scale.factor / likeness : 1,
        bareDb,
        wornDb: bareDb === null || takenOffDb === null ? null : bareDb - takenOffDb,
        worn,
        offDb: under(takenOffDb),
        onDb: under(
          seen.wornActiveDb === null ? takenOffDb : task.level.levelDb - seen.wornActiveDb,
        ),
        isCredited: atEar.creditedTaskIds.has(task.id),
      });
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
        wornDb: null,
        worn: 0,
        offDb: quietDb,
        onDb: quietDb,
        isCredited: false,
      });
    }
    return rows;
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

  levelOf(sum: number): number {
    return levelOfWeight(sum, this.law);
  }

  /** The day with one method alone on all tasks in which a protector is worn, dB. */
  byMethod(method: AttenuationMethod): number | null {
    let sum = 0;
    for (const row of this.rows) {
      const { atEar, task, bareDb, worn } = row;
      if (!atEar?.isWorn || !task?.level || bareDb === null) {
        sum += this.term(row, row.offDb);
        continue;
      }
      const result = atEar.methods.find((one) => one.method === method);
      if (result?.atEarDb == null) return null;
      const wornDb = bareDb - (task.level.levelDb - result.atEarDb);
      sum += this.term(row, wornShareLevelDb(bareDb, wornDb, 100 * worn, this.factor));
    }
    return sum > 0 ? this.levelOf(sum) : null;
  }
}
