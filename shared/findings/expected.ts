import { evaluateDay } from "../acoustics/day";
import { judgedAtEar } from "../acoustics/protection/judged-at-ear";
import type { DayEvaluation, DayInput, RuleSetVersion } from "../acoustics/types";
import { withTasks } from "../acoustics/with-tasks";
import { limitAtEar } from "../rule-sets";
import type { FindingKind } from "../schemas/finding";
import { findCauses } from "./causes";
import { type FindingFacts, leftOf } from "./facts";
import { ORDER_KINDS, WORN_KINDS } from "./orders";
import type { Proposal } from "./remedy";

/** A day to come, evaluated from the nominal day, the usual levels and what is known of the wearing. */
export interface ExpectedDay {
  readonly input: DayInput;
  readonly evaluation: DayEvaluation;
  readonly governing: RuleSetVersion;
}

/** What an expected day asks for, in the way of a finding; nothing of it is stored. */
export interface Ahead {
  readonly kind: FindingKind;
  readonly facts: FindingFacts;
}

/** Not worn long enough is a fault of the day only where it takes the day over: else it is asked about afterwards. */
const FAULT_KINDS: ReadonlySet<FindingKind> = new Set(
  [...WORN_KINDS].filter((kind) => kind !== "not-worn-long-enough"),
);

/** The day at the ear as it is judged, dB; null: not known. */
export const atEarDbOf = ({ counted, atEarDb }: DayEvaluation): number | null =>
  counted ? counted.atEarDb : atEarDb;

/** What is wrong with what is worn on the day as it is expected, the most urgent first. */
export function faultsAhead({ input, evaluation, governing }: ExpectedDay): Ahead[] {
  const causes = findCauses(input, evaluation, governing).filter(
    ({ concerns }) => concerns === "worker",
  );
  const limit = limitAtEar(governing, input.personalTargetDb);
  const atEarDb = atEarDbOf(evaluation);
  // Where the rule has a limit at the ear, being over it is a fault of its own.
  const isOverByWearing = limit?.kind === "target" && atEarDb !== null && atEarDb > limit.levelDb;
  return causes
    .filter(
      ({ kind }) => FAULT_KINDS.has(kind) || (kind === "not-worn-long-enough" && isOverByWearing),
    )
    .map(({ kind, facts }) => ({ kind, facts: { ...facts, isExpected: true } }))
    .toSorted((a, b) => ORDER_KINDS.indexOf(a.kind) - ORDER_KINDS.indexOf(b.kind));
}

/**
 * The one order of an expected day. Where the protector would be enough if it stayed on, it is about the wearing, in the
 * tasks that have to be worn through. Null: nothing is wrong.
 */
export function orderAhead(
  day: ExpectedDay,
  faults: readonly Ahead[],
  proposal: Proposal | null,
): Ahead | null {
  const [worst] = faults;
  if (!worst) return null;
  const facts = { ...worst.facts, ...proposal };
  if (leftOf(facts)?.kind !== "wear-throughout" && worst.kind !== "not-worn-long-enough")
    return { kind: worst.kind, facts };
  const short = tasksToWearThrough(day);
  return short
    ? {
        kind: "not-worn-long-enough",
        facts: { ...facts, ...short, levelDb: atEarDbOf(day.evaluation) },
      }
    : { kind: worst.kind, facts };
}

/** A task in which the protector is off for a part. */
interface PartlyWorn {
  readonly taskId: string;
  readonly taskName: string;
  readonly offMin: number;
  /** What gets in while it is off, in minutes of a level of 0 dB. */
  readonly letIn: number;
}

/**
 * The fewest tasks that make the day right once the protector stays on throughout them, most let in first, and for how
 * long it is off in them together, minutes. All of them where none of it is enough; null where it is off in none.
 */
function tasksToWearThrough({ input, evaluation, governing }: ExpectedDay): FindingFacts | null {
  const off = partlyWorn(input, evaluation);
  if (off.length === 0) return null;
  const isEnough = (count: number): boolean => {
    const worn = wornThrough(input, new Set(off.slice(0, count).map(({ taskId }) => taskId)));
    const then = evaluateDay(worn, governing, []);
    return faultsAhead({ input: worn, evaluation: then, governing }).length === 0;
  };
  const enough = off.findIndex((_, index) => isEnough(index + 1));
  const named = enough < 0 ? off : off.slice(0, enough + 1);
  return {
    taskName: named[0]?.taskName,
    taskNames: named.map(({ taskName }) => taskName),
    offMin: named.reduce((sum, { offMin }) => sum + offMin, 0),
  };
}

/** One entry a task, whichever times of the day it takes. */
function partlyWorn(input: DayInput, evaluation: DayEvaluation): PartlyWorn[] {
  const timed = new Map(
    input.shifts.flatMap(({ tasks }) => tasks.map((task) => [task.id, task] as const)),
  );
  const byTask = new Map<string, PartlyWorn>();
  for (const atEar of evaluation.tasks) {
    const task = timed.get(atEar.timedTaskId);
    if (!task || !atEar.isWorn || task.wornPct === null || task.wornPct >= 100) continue;
    const { inTaskDb, wornDb } = judgedAtEar(atEar, task.protection, input.site);
    const more =
      inTaskDb === null || wornDb === null
        ? 0
        : task.durationMin * (10 ** (inTaskDb / 10) - 10 ** (wornDb / 10));
    const known = byTask.get(task.taskId);
    byTask.set(task.taskId, {
      taskId: task.taskId,
      taskName: task.name,
      offMin: (known?.offMin ?? 0) + (task.durationMin * (100 - task.wornPct)) / 100,
      letIn: (known?.letIn ?? 0) + more,
    });
  }
  return [...byTask.values()].toSorted((a, b) => b.letIn - a.letIn);
}

/** The day as it would be with what is worn in these tasks on the whole time. */
const wornThrough = (input: DayInput, taskIds: ReadonlySet<string>): DayInput =>
  withTasks(input, (task) =>
    taskIds.has(task.taskId) && task.wornPct !== null ? { ...task, wornPct: 100 } : task,
  );

/** A finding of the past as far as it is to be held against the days since. */
interface Past {
  readonly kind: FindingKind;
  readonly state: string;
  /** ISO date of its latest day. */
  readonly lastDate: string;
  /** The active part was credited on that day already. */
  readonly wasCredited: boolean;
}

/**
 * Whether nothing is to be done any more about what is worn: a day since was in order, and the one to come is; or the
 * active part, which the latest day of the finding did not credit yet, is credited and makes the day to come right.
 */
export function isSettled(
  { kind, state, lastDate, wasCredited }: Past,
  lastInOrder: string | null,
  expected: { readonly day: ExpectedDay; readonly faults: readonly Ahead[] } | null,
): boolean {
  if (!WORN_KINDS.has(kind) || (expected && expected.faults.length > 0)) return false;
  if (lastInOrder !== null && lastInOrder > lastDate) return true;
  const isByDevice = kind === "protects-too-little" || kind === "over-limit-at-ear";
  return (
    isByDevice &&
    state !== "done" &&
    !wasCredited &&
    expected?.day.evaluation.counted !== undefined &&
    expected.day.evaluation.word !== null
  );
}

/** The facts of an order as it holds for the day to come: its figures are that day's, and so is what is proposed. */
export function factsAhead(
  { kind, facts }: Ahead,
  faults: readonly Ahead[],
  proposal: Proposal | null,
): FindingFacts {
  const now = faults.find((fault) => fault.kind === kind);
  if (!now) return facts;
  return { ...facts, ...now.facts, ...proposal };
}
