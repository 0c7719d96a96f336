import { judgedAtEar } from "../acoustics/protection/judged-at-ear";
import type {
  Criterion,
  CriterionResult,
  DayEvaluation,
  DayInput,
  Protection,
  RuleSetVersion,
  TaskAtEar,
  TimedTask,
} from "../acoustics/types";
import { actionValueDb, levelOf } from "../rule-sets";
import type { FindingKind } from "../schemas/finding";

/** Something a day shows that a person must act on. One open finding per worker (or group), kind, criterion and use. */
export interface Cause {
  kind: FindingKind;
  /** Whether it concerns the worker or everybody who does the same job. */
  concerns: "worker" | "job";
  criterion: string;
  useKey: string;
  facts: Readonly<Record<string, string | number | null>>;
}

/** A reading that is this far from the tasks says that one of them is wrong. Common practice, no source. */
export const LARGE_GAP_DB = 5;
/** Less than this is the rounding of a time sheet. Common practice, no source. */
const UNACCOUNTED_FROM_MIN = 1;

/** Two tasks with the same devices are one use, however the assignment is worded. */
export const keyOfUse = ({ inner, outer }: Protection): string =>
  [inner.modelId, outer?.modelId].filter(Boolean).join("+");
export const nameOf = ({ inner, outer }: Protection): string =>
  [inner.name, outer?.name].filter(Boolean).join(" + ");

interface Seen {
  task: TimedTask;
  atEar: TaskAtEar;
}

/** The causes in one evaluated day, from the governing rule set only. */
export function findCauses(
  input: DayInput,
  evaluation: DayEvaluation,
  governing: RuleSetVersion,
): Cause[] {
  const causes: Cause[] = [];
  const add = (
    kind: FindingKind,
    facts: Cause["facts"] = {},
    more: Partial<Omit<Cause, "kind" | "facts">> = {},
  ) =>
    causes.push({
      kind,
      concerns: "worker",
      criterion: "",
      useKey: "",
      // What it rests on stays with it: another rule may govern the site later.
      facts: { ...facts, ruleSetKey: governing.key, ruleSetVersion: governing.version },
      ...more,
    });

  const timed = new Map(
    input.shifts.flatMap(({ tasks }) => tasks.map((task) => [task.id, task] as const)),
  );
  const seen: Seen[] = evaluation.tasks.flatMap((atEar) => {
    const task = timed.get(atEar.timedTaskId);
    return task ? [{ task, atEar }] : [];
  });
  const own = evaluation.criteria.filter(({ ruleSetKey }) => ruleSetKey === governing.key);
  const criterionOf = ({ criterionId }: CriterionResult) =>
    governing.criteria.find(({ id }) => id === criterionId);

  for (const result of own) {
    const criterion = criterionOf(result);
    if (!criterion || result.verdict !== "over") continue;
    const about = { criterion: `${governing.key}:${criterion.id}` };
    const facts = {
      levelDb: result.levelDb,
      dosePct: result.dosePct,
      valueDb: levelOf(criterion),
      criterionId: criterion.id,
    };
    if (isMaximum(criterion)) {
      // What lies above the higher value lies above the lower one too: one thing to act on.
      if (!own.some((other) => isExceededHigher(criterionOf(other), other, criterion)))
        add(
          "peak-or-ceiling",
          { ...facts, what: maximumWord(criterion), weighting: criterion.peakWeighting },
          // Passed in one day it is passed in the next: one finding for the group asks to damp it.
          criterion.kind === "action" ? { ...about, concerns: "job" } : about,
        );
    } else if (criterion.kind === "dual-protection") {
      const isSingle = seen.some(
        ({ task, atEar }) =>
          atEar.isWorn && task.protection !== null && task.protection.outer === null,
      );
      const isBare = seen.every(({ atEar }) => !atEar.isWorn);
      if (isSingle || isBare) add("dual-protection", facts, about);
    } else if (criterion.kind === "limit") {
      add(
        criterion.judged === "at-the-ear" ? "over-limit-at-ear" : "over-limit-outside",
        facts,
        about,
      );
    }
  }

  const inNoise = ({ task, atEar }: Seen) =>
    task.zone !== "none" || (atEar.outsideDb !== null && atEar.outsideDb >= input.site.wearFromDb);
  const loud = seen.filter(inNoise);
  const bare = loud.filter(({ task }) => task.protection === null);
  const isRequired =
    input.mustWear ||
    bare.some(({ task }) => task.zone !== "none") ||
    isProtectionOwed(own, governing);
  if (bare.length > 0 && isRequired) {
    const worst = bare.reduce((a, b) =>
      (b.atEar.outsideDb ?? 0) > (a.atEar.outsideDb ?? 0) ? b : a,
    );
    add("no-protector", { taskName: worst.task.name, outsideDb: worst.atEar.outsideDb });
  }

  const worn = loud.filter(({ task }) => task.protection !== null);
  const deciding = worn.find(({ atEar }) => atEar.timedTaskId === evaluation.decidingTaskId);
  if (deciding && (evaluation.word === "too-little" || evaluation.word === "too-much")) {
    const protection = deciding.task.protection as Protection;
    add(
      evaluation.word === "too-little" ? "protects-too-little" : "protects-too-much",
      {
        taskName: deciding.task.name,
        protector: nameOf(protection),
        wornDb: evaluation.counted ? evaluation.counted.whileWornDb : deciding.atEar.wornDb,
        outsideDb: deciding.atEar.outsideDb,
      },
      { useKey: keyOfUse(protection) },
    );
  }

  const unknown = worn.find(({ task }) => task.wornPct === null);
  if (unknown)
    add(
      "wearing-unknown",
      { taskName: unknown.task.name },
      { useKey: keyOfUse(unknown.task.protection as Protection) },
    );
  const short = worn.filter((one) => isWornTooShort(one, governing, input));
  if (short.length > 0) {
    const judged = short.map(({ task, atEar }) => ({
      task,
      atEar: judgedAtEar(atEar, task.protection, input.site),
    }));
    const { task, atEar } = judged.reduce((a, b) =>
      (b.atEar.inTaskDb ?? 0) > (a.atEar.inTaskDb ?? 0) ? b : a,
    );
    add(
      "not-worn-long-enough",
      {
        taskName: task.name,
        offMin: (task.durationMin * (100 - (task.wornPct ?? 100))) / 100,
        wornDb: atEar.wornDb,
        inTaskDb: atEar.inTaskDb,
      },
      { useKey: keyOfUse(task.protection as Protection) },
    );
  }

  if (evaluation.readingGapDb !== null && Math.abs(evaluation.readingGapDb) >= LARGE_GAP_DB) {
    add("reading-gap", { gapDb: evaluation.readingGapDb, tasksDb: evaluation.tasksDb });
  }
  if (
    evaluation.unaccountedMin >= UNACCOUNTED_FROM_MIN &&
    input.shifts.some(({ unaccounted }) => unaccounted.how === "unknown")
  ) {
    add("time-not-accounted", { unaccountedMin: evaluation.unaccountedMin });
  }
  for (const criterion of missingCriteria(evaluation, governing)) {
    add(
      "reading-missing",
      { criterionId: criterion.id, quantity: criterion.quantity },
      { concerns: "job", criterion: `${governing.key}:${criterion.id}` },
    );
  }
  return causes;
}

const isMaximum = ({ quantity }: Criterion): boolean =>
  quantity === "peak" || quantity === "slow-maximum";

const maximumWord = ({ kind }: Criterion): string => (kind === "action" ? "action-peak" : kind);

const isExceededHigher = (
  higher: Criterion | undefined,
  { verdict }: CriterionResult,
  than: Criterion,
): boolean => verdict === "over" && higher?.quantity === than.quantity && higher.value > than.value;

/** Below this nobody sends out a meter for a peak. Common practice, no source. */
const PEAKS_FROM_DB = 80;

/** One reading settles all criteria on the same quantity, so that one finding asks for it. */
function missingCriteria(evaluation: DayEvaluation, governing: RuleSetVersion): Criterion[] {
  const byQuantity = new Map<string, Criterion>();
  for (const id of evaluation.missingReadings) {
    const criterion = governing.criteria.find((one) => one.id === id);
    if (!criterion) continue;
    if (
      isMaximum(criterion) &&
      (evaluation.outsideDb === null || evaluation.outsideDb < PEAKS_FROM_DB)
    )
      continue;
    if (!byQuantity.has(criterion.quantity)) byQuantity.set(criterion.quantity, criterion);
  }
  return [...byQuantity.values()];
}

/** The highest action value is reached, or a limit is passed: protectors have to be there. */
function isProtectionOwed(own: readonly CriterionResult[], governing: RuleSetVersion): boolean {
  const target = actionValueDb(governing);
  return own.some((result) => {
    const criterion = governing.criteria.find(({ id }) => id === result.criterionId);
    if (!criterion || result.verdict !== "over" || criterion.judged !== "without-protection")
      return false;
    if (isMaximum(criterion)) return false;
    if (criterion.kind === "limit") return true;
    return criterion.kind === "action" && (target === null || levelOf(criterion) >= target);
  });
}

/** Right while worn, but off for long enough that the task is no longer brought down to the target. */
function isWornTooShort(
  { task, atEar }: Seen,
  governing: RuleSetVersion,
  input: DayInput,
): boolean {
  const targetDb =
    input.personalTargetDb ?? governing.protection.targetDb ?? actionValueDb(governing);
  const { wornDb, inTaskDb } = judgedAtEar(atEar, task.protection, input.site);
  if (
    targetDb === null ||
    wornDb === null ||
    inTaskDb === null ||
    task.wornPct === null ||
    task.wornPct >= 100
  )
    return false;
  return wornDb <= targetDb && inTaskDb > targetDb;
}
