import { accountedMin, type DaySum, type Sum, sumDay, unaccountedMin } from "./day-sum";
import { dayUncertainty } from "./day-uncertainty";
import { twaDb } from "./dose";
import {
  doseScale,
  type ExchangeLaw,
  isSameLaw,
  lawOf,
  leastWeight,
  levelFactor,
  levelOfWeight,
} from "./exchange-law";
import { dayMaximum } from "./maximum";
import { outsideCriterion } from "./outside-criterion";
import { appendixBWord, decidingTask } from "./protection/adequacy";
import { type DayAtEar, evaluateAtEar } from "./protection/at-ear";
import type {
  Criterion,
  CriterionResult,
  DayEvaluation,
  DayInput,
  Grade,
  ProtectorWord,
  Reason,
  RuleSetVersion,
  TaskAtEar,
} from "./types";
import { isClearlyOver, judge } from "./verdict";

/** Number of this arithmetic. A change adds a new one beside it, so that an old result can be run again. */
export const METHOD_VERSION = 1;

/**
 * Every criterion of the governing rule set and of those for comparison, on one worker's whole day: all shifts added
 * up, the day in its full length, over a reference of 8 h. Levels in dB, nothing rounded.
 *
 * A level carries its metric: where it can't serve a criterion exactly, it bounds it, and proves one side or leaves the
 * verdict open. What is not known makes a verdict Not assessed unless what is known is already over.
 *
 * @source iso-9612-2009 9, 15
 * @source osha-1910.95 App. A, App. B
 */
export function evaluateDay(
  input: DayInput,
  governing: RuleSetVersion,
  comparison: readonly RuleSetVersion[],
): DayEvaluation {
  const day = new Day(input);
  const criteria: CriterionResult[] = [];
  day.judgeAll(governing, criteria);
  const outside = outsideCriterion(governing);
  const outsideSum = day.sum(lawOf(outside));
  const outsideResult = criteria.find(({ criterionId }) => criterionId === outside.id)!;
  const atEar = day.atEar(governing);
  const protector = judgeProtector(input, governing, atEar);
  const missingReadings = readingsThatWouldDecide(governing, criteria);
  for (const ruleSet of comparison) {
    if (ruleSet !== governing) day.judgeAll(ruleSet, criteria);
  }

  let shiftMin = 0;
  let accounted = 0;
  let unaccounted = 0;
  for (const shift of input.shifts) {
    shiftMin += shift.lengthMin;
    accounted += accountedMin(shift);
    unaccounted += unaccountedMin(shift);
  }
  const law = lawOf(outside);
  const tasksDb = outsideSum.hasReading ? exactLevelDb(outsideSum.tasks, outside) : null;
  const uncertainty = day.uncertainty();
  const atEarBound = atEar.isWorn
    ? boundAtEar(atEar, protector.word, criteria, governing)
    : outsideResult.bound;
  return {
    methodVersion: METHOD_VERSION,
    date: input.date,
    shiftMin,
    accountedMin: accounted,
    unaccountedMin: unaccounted,
    grade: gradeOf(input, outsideSum),
    isProjected: outsideSum.basis === "projected-reading",
    keptReasons: keptReasons(input),
    outsideDb: outsideResult.levelDb,
    outsideBound: outsideResult.bound,
    atEarDb: atEar.isWorn ? shownLevelDb(atEar.off, law, atEar, atEarBound) : outsideResult.levelDb,
    atEarBound,
    atEarActiveDb: atEar.on && shownLevelDb(atEar.on, law, atEar, atEarBound),
    atEarAsWorkedDb: atEar.asWorked && shownLevelDb(atEar.asWorked, law, atEar, atEarBound),
    ...(atEar.creditedTaskIds.size > 0 && {
      counted: {
        atEarDb: shownLevelDb(atEar.judged, law, atEar, atEarBound),
        whileWornDb: protector.wornDb,
      },
    }),
    uncertaintyDb: uncertainty.budget?.expandedDb ?? null,
    uncertaintyReason: uncertainty.reason,
    criteria,
    tasks: atEar.tasks,
    word: protector.word,
    decidingTaskId: protector.decidingTaskId,
    protectorReason: protector.reason,
    sharesPct: sharesPct(input, law),
    tasksDb,
    readingGapDb:
      tasksDb === null || outsideResult.levelDb === null ? null : outsideResult.levelDb - tasksDb,
    missingReadings,
  };
}

/** What several criteria of a day share, each computed once. */
class Day {
  private readonly sums: { law: ExchangeLaw; sum: DaySum }[] = [];
  private readonly atEars: { ruleSet: RuleSetVersion; atEar: DayAtEar }[] = [];
  private uncertain: ReturnType<typeof dayUncertainty> | undefined;

  constructor(private readonly input: DayInput) {}

  sum(law: ExchangeLaw): DaySum {
    for (const known of this.sums) if (isSameLaw(known.law, law)) return known.sum;
    const sum = sumDay(this.input, law);
    this.sums.push({ law, sum });
    return sum;
  }

  atEar(ruleSet: RuleSetVersion): DayAtEar {
    for (const known of this.atEars) if (known.ruleSet === ruleSet) return known.atEar;
    const law = lawOf(outsideCriterion(ruleSet));
    const atEar = evaluateAtEar(this.input, ruleSet, law, this.sum(law));
    this.atEars.push({ ruleSet, atEar });
    return atEar;
  }

  uncertainty(): ReturnType<typeof dayUncertainty> {
    this.uncertain ??= dayUncertainty(this.input);
    return this.uncertain;
  }

  judgeAll(ruleSet: RuleSetVersion, results: CriterionResult[]): void {
    for (const criterion of ruleSet.criteria) {
      // A week is more than this day.
      if (criterion.quantity === "lex-weekly") continue;
      results.push(this.judge(criterion, ruleSet));
    }
  }

  private judge(criterion: Criterion, ruleSet: RuleSetVersion): CriterionResult {
    if (criterion.quantity === "slow-maximum" || criterion.quantity === "peak") {
      return judgeMaximum(this.input, criterion, ruleSet);
    }
    const outside = this.sum(lawOf(criterion));
    if (criterion.judged === "without-protection") {
      return judgeSum(
        criterion,
        ruleSet,
        outside,
        outside.basis,
        this.uncertaintyFor(criterion),
        null,
      );
    }
    const atEar = this.atEar(ruleSet);
    return judgeSum(
      criterion,
      ruleSet,
      atEar.judged,
      outside.basis,
      this.uncertaintyFor(criterion),
      atEar,
    );
  }

  /** Only an energy level has one, and only where both the rule and the site put it into verdicts. */
  private uncertaintyFor(criterion: Criterion): number | null {
    if (!criterion.usesUncertainty || !this.input.site.usesUncertainty) return null;
    if (criterion.quantity !== "lex-8h") return null;
    return this.uncertainty().budget?.expandedDb ?? null;
  }
}

function judgeSum(
  criterion: Criterion,
  ruleSet: RuleSetVersion,
  sum: Sum,
  basis: CriterionResult["basis"],
  uncertaintyDb: number | null,
  atEar: DayAtEar | null,
): CriterionResult {
  const isDose = criterion.quantity === "dose" || criterion.quantity === "table-dose";
  const scale = doseScale(lawOf(criterion));
  const amountOf = (weight: number): number =>
    isDose ? 100 * weight * scale : levelDbOf(weight, criterion);
  const least = amountOf(sum.least);
  const isExact = sum.least === sum.most;
  const most = isExact ? least : amountOf(sum.most);
  const { value, comparator } = criterion;
  const outcome = judge(least, most, value, comparator, uncertaintyDb);

  let verdict: CriterionResult["verdict"];
  let reason: Reason | null = null;
  let shown: number | null;
  let bound: CriterionResult["bound"] = "exact";
  if (outcome === "over") {
    verdict = "over";
    shown = least;
    if (!isExact) bound = "lower";
  } else if (outcome === "under") {
    verdict = "under";
    shown = most;
    if (!isExact) bound = "upper";
  } else if (isExact) {
    verdict = "cant-tell-yet";
    reason = "within-uncertainty";
    shown = least;
  } else {
    const missing = sum.missing ?? (atEar && whyAtEarIsOpen(atEar));
    verdict = missing === null ? "cant-tell-yet" : "not-assessed";
    reason = missing;
    shown = null;
    if (missing === "wearing-unknown") {
      shown = least;
      bound = "lower";
    } else if (missing === null) {
      bound = most < Number.POSITIVE_INFINITY ? "upper" : "lower";
      reason = bound === "upper" ? "only-upper-bound" : "only-lower-bound";
      shown = bound === "upper" ? most : least;
    }
  }
  const dosePct = isDose ? shown : null;
  const levelDb = isDose && shown !== null ? twaOf(shown, criterion) : finite(shown);
  if (dosePct === 0 && verdict === "under") reason = "below-threshold";
  return {
    ruleSetKey: ruleSet.key,
    ruleSetVersion: ruleSet.version,
    criterionId: criterion.id,
    judged: criterion.judged,
    levelDb,
    dosePct,
    bound,
    basis,
    uncertaintyDb,
    verdict,
    isClear: verdict === "over" && isClearlyOver(least, value, comparator, uncertaintyDb),
    reason,
  };
}

/** Why the level at the ear is open although the noise is known: the wearing, or what the protector takes off. */
function whyAtEarIsOpen(atEar: DayAtEar): Reason | null {
  if (atEar.isWearingUnknown) return "wearing-unknown";
  for (const task of atEar.tasks) {
    if (task.isWorn && task.governingMethod === null && task.reason !== null) return task.reason;
  }
  return null;
}

function judgeMaximum(
  input: DayInput,
  criterion: Criterion,
  ruleSet: RuleSetVersion,
): CriterionResult {
  const { leastDb, mostDb, basis, reason } = dayMaximum(input, criterion, ruleSet.protection);
  const outcome = judge(leastDb, mostDb, criterion.value, criterion.comparator, null);
  const isDecided = outcome !== "undecided";
  const isExact = leastDb === mostDb;
  return {
    ruleSetKey: ruleSet.key,
    ruleSetVersion: ruleSet.version,
    criterionId: criterion.id,
    judged: criterion.judged,
    levelDb: isDecided ? finite(outcome === "over" ? leastDb : mostDb) : null,
    dosePct: null,
    bound: !isDecided || isExact ? "exact" : outcome === "over" ? "lower" : "upper",
    basis,
    uncertaintyDb: null,
    verdict: outcome === "undecided" ? "not-assessed" : outcome,
    isClear: false,
    reason: isDecided ? null : reason,
  };
}

/** Level over the reference time of minutes times weight, dB. */
function levelDbOf(weight: number, criterion: Criterion): number {
  return levelOfWeight(weight / criterion.referenceMin, lawOf(criterion));
}

function twaOf(dosePct: number, criterion: Criterion): number | null {
  return twaDb(dosePct, {
    criterionLevelDb: criterion.criterionLevelDb!,
    exchangeRateDb: criterion.exchangeRateDb!,
    twaFactor: criterion.twaFactor,
  });
}

function finite(level: number | null): number | null {
  return level !== null && Number.isFinite(level) ? level : null;
}

/** The level of a sum that is exactly known, dB; null where it is not, or is none. */
function exactLevelDb(sum: Sum, criterion: Criterion): number | null {
  if (sum.missing !== null || sum.least !== sum.most) return null;
  const law = lawOf(criterion);
  return law.isEnergy
    ? finite(levelDbOf(sum.least, criterion))
    : twaOf(100 * sum.least * doseScale(law), criterion);
}

/**
 * The end of what is possible at the ear that is shown: the least where it proves that it is too much, where the wearing
 * is not known (it is that of wearing it all the time) or where nothing bounds the most; else the most.
 */
function boundAtEar(
  atEar: DayAtEar,
  word: ProtectorWord | null,
  criteria: readonly CriterionResult[],
  ruleSet: RuleSetVersion,
): DayEvaluation["atEarBound"] {
  const { least, most } = atEar.off;
  if (least === most) return "exact";
  const isOver =
    (ruleSet.protection.adequacy === "appendix-b" && word === "too-little") ||
    ruleSet.criteria.some(
      ({ id, judged, quantity }) =>
        judged === "at-the-ear" &&
        quantity !== "peak" &&
        quantity !== "slow-maximum" &&
        criteria.some(
          ({ ruleSetKey, criterionId, verdict }) =>
            ruleSetKey === ruleSet.key && criterionId === id && verdict === "over",
        ),
    );
  return isOver || atEar.isWearingUnknown || most === Number.POSITIVE_INFINITY ? "lower" : "upper";
}

/** A level at the ear to show, dB. Null where it is not known what a protector takes off. */
function shownLevelDb(
  sum: Sum,
  law: ExchangeLaw,
  atEar: DayAtEar,
  bound: DayEvaluation["atEarBound"],
): number | null {
  if (sum.missing !== null) return null;
  if (atEar.tasks.some(({ isWorn, governingMethod }) => isWorn && governingMethod === null))
    return null;
  const weight = bound === "lower" ? sum.least : sum.most;
  return weight > 0 ? levelFactor(law) * Math.log10(weight / law.referenceMin) : null;
}

interface ProtectorJudgement {
  readonly word: ProtectorWord | null;
  readonly decidingTaskId: string | null;
  /** While worn in the deciding task, active part on where it is credited; null without a word. */
  readonly wornDb: number | null;
  readonly reason: Reason | null;
}

const noWord = (reason: Reason | null): ProtectorJudgement => ({
  word: null,
  decidingTaskId: null,
  wornDb: null,
  reason,
});

/**
 * The day's word for its protectors. By EN 458 that of the worst task while worn; by Appendix B the shift's TWA with
 * the protectors on, against the rule's target or this worker's own.
 */
function judgeProtector(
  input: DayInput,
  ruleSet: RuleSetVersion,
  atEar: DayAtEar,
): ProtectorJudgement {
  const worn = atEar.tasks.filter(({ isWorn }) => isWorn);
  if (worn.length === 0) return noWord(null);
  const { adequacy, targetDb } = ruleSet.protection;
  if (adequacy === "not-stated" || targetDb === null) {
    return noWord("not-stated");
  }
  return adequacy === "en-458"
    ? judgeByTask(worn, atEar)
    : judgeByShift(worn, atEar, ruleSet, Math.min(targetDb, input.personalTargetDb ?? targetDb));
}

function judgeByTask(worn: readonly TaskAtEar[], atEar: DayAtEar): ProtectorJudgement {
  const judged = worn.map((task) => {
    const isCredited = atEar.creditedTaskIds.has(task.timedTaskId);
    return {
      id: task.timedTaskId,
      word: isCredited ? task.wordActive : task.word,
      wornDb: isCredited ? task.wornActiveDb : task.wornDb,
    };
  });
  const deciding = decidingTask(judged);
  const open = worn.find(
    ({ governingMethod, word, reason }) =>
      governingMethod === null ||
      (word === null && (reason === "only-upper-bound" || reason === "only-lower-bound")),
  );
  // An unknown task could still be worse than any word but the worst.
  if (open && deciding?.word !== "too-little") {
    return noWord(open.reason);
  }
  return deciding
    ? { word: deciding.word, decidingTaskId: deciding.id, wornDb: deciding.wornDb, reason: null }
    : noWord(null);
}

function judgeByShift(
  worn: readonly TaskAtEar[],
  atEar: DayAtEar,
  ruleSet: RuleSetVersion,
  targetDb: number,
): ProtectorJudgement {
  const law = lawOf(outsideCriterion(ruleSet));
  const levelOf = (weight: number): number =>
    levelFactor(law) * Math.log10(weight / law.referenceMin);
  const { least, most, missing } = atEar.fullyWorn;
  const atLeast = appendixBWord(levelOf(least), targetDb);
  const atMost = appendixBWord(levelOf(most), targetDb);
  const loudest = worn.reduce((a, b) => ((b.wornDb ?? 0) > (a.wornDb ?? 0) ? b : a));
  if (atLeast !== atMost) {
    const open = worn.find(({ governingMethod }) => governingMethod === null);
    const bound = most === Number.POSITIVE_INFINITY ? "only-lower-bound" : "only-upper-bound";
    return noWord(missing ?? open?.reason ?? bound);
  }
  return {
    word: atMost,
    decidingTaskId: loudest.timedTaskId,
    wornDb: atEar.creditedTaskIds.has(loudest.timedTaskId) ? loudest.wornActiveDb : loudest.wornDb,
    reason: null,
  };
}

const GRADES: readonly Grade[] = ["measured-worker", "measured-group", "task-level", "estimate"];

/** As good as its weakest part; measured on the worker where readings govern every shift. */
function gradeOf(input: DayInput, outside: DaySum): Grade {
  if (outside.basis !== "tasks") return "measured-worker";
  let worst = 0;
  for (const shift of input.shifts) {
    for (const { level } of shift.tasks) {
      worst = Math.max(worst, level ? GRADES.indexOf(level.grade) : GRADES.length - 1);
    }
    // A level that somebody states for quiet time, or time like the rest, is an estimate of little energy.
    if (shift.tasks.length === 0) worst = GRADES.length - 1;
  }
  return GRADES[worst]!;
}

/** The officer's reasons for readings, and for samples behind a task's level, that count all the same. */
function keptReasons(input: DayInput): readonly string[] {
  let reasons: string[] | undefined;
  const add = (reason: string) => {
    reasons ??= [];
    if (!reasons.includes(reason)) reasons.push(reason);
  };
  for (const shift of input.shifts) {
    for (const { covers, keptReason } of shift.readings) {
      if (keptReason !== null && covers !== "part") add(keptReason);
    }
    for (const { level } of shift.tasks) {
      for (const reason of level?.keptReasons ?? NONE) add(reason);
    }
  }
  return reasons ?? NONE;
}

const NONE: readonly string[] = [];

/** Each task's share in what the governing law adds up, percent; quiet time has the rest. */
function sharesPct(input: DayInput, law: ExchangeLaw): Record<string, number> {
  const weight = (levelDb: number) => leastWeight({ kind: "steady" }, levelDb, law);
  const shares: Record<string, number> = {};
  let total = 0;
  for (const shift of input.shifts) {
    for (const { id, durationMin, level } of shift.tasks) {
      if (level === null) continue;
      const amount = durationMin * weight(level.levelDb);
      shares[id] = amount;
      total += amount;
    }
    if (shift.unaccounted.how === "quiet") {
      total += unaccountedMin(shift) * weight(shift.unaccounted.levelDb);
    }
  }
  for (const id in shares) shares[id] = total === 0 ? 0 : (100 * shares[id]!) / total;
  return shares;
}

const DECIDED_BY_A_READING: ReadonlySet<Reason> = new Set([
  "only-upper-bound",
  "only-lower-bound",
  "no-peak",
  "peak-weighting",
  "no-slow-maximum",
]);

/** Binding criteria of the governing rule set that stay open for want of a reading that serves them. */
function readingsThatWouldDecide(
  ruleSet: RuleSetVersion,
  results: readonly CriterionResult[],
): readonly string[] {
  let missing: string[] | undefined;
  for (const { criterionId, reason, verdict } of results) {
    if (verdict === "under" || verdict === "over") continue;
    if (reason === null || !DECIDED_BY_A_READING.has(reason)) continue;
    if (ruleSet.criteria.find(({ id }) => id === criterionId)?.force !== "must") continue;
    missing ??= [];
    missing.push(criterionId);
  }
  return missing ?? NONE;
}
