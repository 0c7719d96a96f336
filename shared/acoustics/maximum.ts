import { isCutShort, isProjected, missingTime, unaccountedMin } from "./day-sum";
import { countsAsWorn } from "./protection/at-ear";
import { type PeakReduction, peakReduction } from "./protection/impulse";
import type {
  Criterion,
  CriterionResult,
  DayInput,
  PeakLevel,
  Reason,
  RuleSetVersion,
  ShiftInput,
  TaskLevel,
  TimedTask,
} from "./types";

/** The greatest level of a day, between what is certain and what is possible. */
export interface MaximumBounds {
  readonly leastDb: number;
  readonly mostDb: number;
  readonly basis: CriterionResult["basis"];
  readonly reason: Reason | null;
}

/** What one source says about a maximum; null: nothing. */
interface Stated {
  readonly lasMaxDb: number | null;
  readonly peak: PeakLevel | null;
}

/**
 * The day's slow maximum or peak for a criterion. Maxima are never averaged: the greatest of all counts. A reading
 * over the shift governs it; a part of it, or one that leaves out time of which nothing is known, still proves what it
 * shows. A mean level proves that the slow maximum is
 * at least as much, and a slow maximum that an A-weighted peak is.
 *
 * At the ear a protector is credited against a C-weighted peak by the type of the impulse noise, where type and H, M, L
 * are known and it is worn throughout; a peak may come while it is off. Against a slow maximum none is. What is not
 * credited is not assessed unless it is under the value without it.
 *
 * @source en-458 Annex B
 * @source osha-1910.95 (a), (b): the ceiling on slow, the peak apart
 * @source eu-2003-10-ec art. 2(a)
 */
export function dayMaximum(
  day: DayInput,
  criterion: Criterion,
  rule: RuleSetVersion["protection"],
): MaximumBounds {
  const isAtEar = criterion.judged === "at-the-ear";
  let leastDb = Number.NEGATIVE_INFINITY;
  let mostDb = Number.NEGATIVE_INFINITY;
  let reason: Reason | null = day.shifts.length === 0 ? "no-tasks" : null;
  let byReading = 0;
  let byProjected = 0;

  const take = (atLeastDb: number, atMostDb: number, isWorn: boolean, why: Reason | null) => {
    // A protector may take anything off, but adds nothing.
    if (!isWorn) leastDb = Math.max(leastDb, atLeastDb);
    mostDb = Math.max(mostDb, atMostDb);
    reason ??= why ?? (isWorn && atMostDb > criterion.value ? "peak-at-ear-not-assessed" : null);
  };

  for (const shift of day.shifts) {
    const isWorn = isAtEar && shift.tasks.some((task) => isWornAtAll(task, day));
    const ofShift = isWorn ? reductionOfShift(shift, day, criterion, rule) : null;
    let coveringDb = Number.NEGATIVE_INFINITY;
    let isByLikeness = false;
    let isCut = false;
    for (const reading of shift.readings) {
      const statedDb = statedMaximumDb(reading, criterion);
      if (statedDb === null) continue;
      if (ofShift === null) take(statedDb, statedDb, isWorn, null);
      else takeReduced(statedDb, ofShift, criterion, take);
      if (reading.covers === "part") continue;
      isCut ||= isCutShort(reading);
      if (isCutShort(reading)) continue;
      coveringDb = Math.max(coveringDb, statedDb);
      isByLikeness ||= isProjected(reading);
      const { leftOut } = reading;
      if (leftOut?.how === "quiet" && criterion.quantity === "slow-maximum")
        take(leftOut.levelDb, leftOut.levelDb, false, null);
    }
    if (coveringDb > Number.NEGATIVE_INFINITY) {
      byReading++;
      if (isByLikeness) byProjected++;
      continue;
    }
    if (isCut) take(Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY, false, "time-unknown");
    takeTasks(shift, day, criterion, rule, take);
  }
  return {
    leastDb,
    mostDb: day.shifts.length === 0 ? Number.POSITIVE_INFINITY : mostDb,
    basis:
      byReading === 0 || byReading < day.shifts.length
        ? "tasks"
        : byProjected > 0
          ? "projected-reading"
          : "reading",
    reason,
  };
}

type Take = (atLeastDb: number, atMostDb: number, isWorn: boolean, why: Reason | null) => void;

/** A peak under a protector: while worn, and bare where it may come while the protector is off. */
interface Reduced {
  readonly reduction: PeakReduction;
  readonly whyBare: Reason | null;
}

function takeReduced(
  statedDb: number,
  { reduction, whyBare }: Reduced,
  { value }: Criterion,
  take: Take,
): void {
  const atEarDb = statedDb - reduction.reductionDb;
  if (whyBare === null) take(atEarDb, atEarDb, false, null);
  else take(atEarDb, statedDb, false, statedDb > value ? whyBare : null);
}

/** Null where nothing says how much comes off a peak of this task. */
function reductionOf(
  task: TimedTask,
  criterion: Criterion,
  rule: RuleSetVersion["protection"],
): Reduced | null {
  const { level, protection, wornPct } = task;
  if (criterion.quantity !== "peak" || criterion.peakWeighting !== "C") return null;
  if (level === null || protection === null) return null;
  const reduction = peakReduction(level, protection, rule);
  if (reduction === null) return null;
  const whyBare = wornPct === null ? "wearing-unknown" : wornPct < 100 ? "worn-in-part" : null;
  return { reduction, whyBare };
}

/**
 * What comes off a peak that a reading states for a whole shift: it may have come in any task, so the least of all, and
 * only where all of the shift is known and every task says how much.
 */
function reductionOfShift(
  shift: ShiftInput,
  day: DayInput,
  criterion: Criterion,
  rule: RuleSetVersion["protection"],
): Reduced | null {
  if (unaccountedMin(shift) > 0) return null;
  let least: Reduced | null = null;
  let whyBare: Reason | null = null;
  for (const task of shift.tasks) {
    if (task.durationMin === 0) continue;
    const one = isWornAtAll(task, day) ? reductionOf(task, criterion, rule) : null;
    if (one === null) return null;
    whyBare ??= one.whyBare;
    if (least === null || one.reduction.reductionDb < least.reduction.reductionDb) least = one;
  }
  return least && { ...least, whyBare };
}

/** A peak that counts at the ear with a protector credited; for showing the working. */
export interface CreditedPeak {
  /** Null for a reading over the shift. */
  readonly task: TimedTask | null;
  readonly statedDb: number;
  readonly atEarDb: number;
  readonly by: PeakReduction;
}

/** Every peak of a day from which a protector takes something off under a criterion. */
export function creditedPeaks(
  day: DayInput,
  criterion: Criterion,
  rule: RuleSetVersion["protection"],
): CreditedPeak[] {
  if (criterion.quantity !== "peak" || criterion.judged !== "at-the-ear") return [];
  const found: CreditedPeak[] = [];
  const add = (task: TimedTask | null, statedDb: number | null, reduced: Reduced | null) => {
    if (statedDb === null || reduced === null) return;
    const { reduction } = reduced;
    found.push({ task, statedDb, atEarDb: statedDb - reduction.reductionDb, by: reduction });
  };
  for (const shift of day.shifts) {
    const ofShift = reductionOfShift(shift, day, criterion, rule);
    let isCovered = false;
    for (const reading of shift.readings) {
      const statedDb = statedMaximumDb(reading, criterion);
      add(null, statedDb, ofShift);
      isCovered ||= statedDb !== null && reading.covers !== "part" && !isCutShort(reading);
    }
    if (isCovered) continue;
    for (const task of shift.tasks) {
      if (task.level === null || task.durationMin === 0 || !isWornAtAll(task, day)) continue;
      add(task, statedMaximumDb(task.level, criterion), reductionOf(task, criterion, rule));
    }
  }
  return found;
}

function takeTasks(
  shift: ShiftInput,
  day: DayInput,
  criterion: Criterion,
  rule: RuleSetVersion["protection"],
  take: Take,
): void {
  const unlimited = Number.POSITIVE_INFINITY;
  for (const task of shift.tasks) {
    if (task.durationMin === 0) continue;
    const isWorn = criterion.judged === "at-the-ear" && isWornAtAll(task, day);
    if (task.level === null) {
      take(Number.NEGATIVE_INFINITY, unlimited, isWorn, "level-missing");
      continue;
    }
    const statedDb = statedMaximumDb(withSteady(task.level), criterion);
    const reduced = isWorn && statedDb !== null ? reductionOf(task, criterion, rule) : null;
    if (statedDb !== null && reduced !== null) takeReduced(statedDb, reduced, criterion, take);
    else if (statedDb !== null) take(statedDb, statedDb, isWorn, null);
    else take(provenDb(task.level, criterion), unlimited, isWorn, whyNot(task.level, criterion));
  }
  // Time said to be quiet has its level for a maximum too.
  if (shift.unaccounted.how === "quiet" && criterion.quantity === "slow-maximum") {
    take(shift.unaccounted.levelDb, shift.unaccounted.levelDb, false, null);
  }
  const missing = missingTime(shift);
  if (missing !== null) take(Number.NEGATIVE_INFINITY, unlimited, false, missing);
}

function isWornAtAll(task: ShiftInput["tasks"][number], day: DayInput): boolean {
  return task.wornPct !== 0 && countsAsWorn(task, day);
}

/** A level read on slow that hardly moves is its own slow maximum. */
function withSteady(level: TaskLevel): Stated {
  if (level.lasMaxDb !== null || level.metric.kind !== "steady") return level;
  return { lasMaxDb: level.levelDb, peak: level.peak };
}

function statedMaximumDb({ lasMaxDb, peak }: Stated, criterion: Criterion): number | null {
  if (criterion.quantity === "slow-maximum") return lasMaxDb;
  if (peak === null) return null;
  const { peakWeighting } = criterion;
  return peakWeighting === null || peakWeighting === peak.weighting ? peak.levelDb : null;
}

/** What a level proves about a maximum that it doesn't state, dB. */
function provenDb(level: TaskLevel, { quantity, peakWeighting }: Criterion): number {
  if (quantity === "peak" && peakWeighting !== "A") return Number.NEGATIVE_INFINITY;
  if (level.lasMaxDb !== null) return level.lasMaxDb;
  const { metric } = level;
  if (metric.kind === "lavg" && metric.settings.weighting !== "A") return Number.NEGATIVE_INFINITY;
  return level.levelDb;
}

function whyNot(level: TaskLevel, { quantity }: Criterion): Reason {
  if (quantity === "slow-maximum") return "no-slow-maximum";
  return level.peak === null ? "no-peak" : "peak-weighting";
}
