import { lawOf } from "../acoustics/exchange-law";
import { outsideCriterion } from "../acoustics/outside-criterion";
import type {
  CriterionResult,
  DayEvaluation,
  DayInput,
  RuleSetVersion,
  Verdict,
} from "../acoustics/types";
import { whileWorn } from "../acoustics/while-worn";
import type { DayFigures } from "../schemas/finding";

/** The one word for several criteria: what is certain and worst, before what is open, before what is fine. */
export function headline(results: readonly Pick<CriterionResult, "verdict">[]): Verdict {
  for (const verdict of ["over", "cant-tell-yet", "under"] as const) {
    if (results.some((result) => result.verdict === verdict)) return verdict;
  }
  return "not-assessed";
}

/** A target that is stricter for this worker than the rule's; null where the rule's own holds, or it has none. */
function ownTargetDb(
  { personalTargetDb }: DayInput,
  { protection: { adequacy, targetDb } }: RuleSetVersion,
): number | null {
  if (personalTargetDb === null || targetDb === null || adequacy === "not-stated") return null;
  return personalTargetDb < targetDb ? personalTargetDb : null;
}

const levelQuantities: ReadonlySet<string | undefined> = new Set(["lex-8h", "dose", "table-dose"]);

export type DaySummary = Omit<DayFigures, "resultId" | "origin"> & {
  decidingTaskId: string | null;
  dosePct: number | null;
  doseBound: CriterionResult["bound"];
};

/** What a list row, a strip and a stored result need of an evaluated day. */
export function summarizeDay(
  input: DayInput,
  evaluation: DayEvaluation,
  governing: RuleSetVersion,
): DaySummary {
  const own = evaluation.criteria.filter(({ ruleSetKey }) => ruleSetKey === governing.key);
  const quantityOf = ({ criterionId }: CriterionResult) =>
    governing.criteria.find(({ id }) => id === criterionId)?.quantity;
  const levels = own.filter((result) => levelQuantities.has(quantityOf(result)));
  const outside = levels.filter(({ judged }) => judged === "without-protection");
  const dose = outside.find(({ dosePct }) => dosePct !== null);
  const atEar = levels.filter(({ judged }) => judged === "at-the-ear");
  const tasks = input.shifts.flatMap((shift) => shift.tasks);
  const worn = whileWorn(evaluation);
  const decidingTask = tasks.find(({ id }) => id === evaluation.decidingTaskId);
  return {
    date: evaluation.date,
    outsideDb: evaluation.outsideDb,
    outsideBound: evaluation.outsideBound,
    atEarDb: evaluation.counted ? evaluation.counted.atEarDb : evaluation.atEarDb,
    atEarOffDb: evaluation.counted ? evaluation.atEarDb : null,
    atEarBound: evaluation.atEarBound,
    atEarActiveDb: evaluation.atEarActiveDb,
    atEarAsWorkedDb: evaluation.atEarAsWorkedDb,
    // It belongs to an energy level: a time-weighted average of another exchange rate has none (ISO 9612).
    uncertaintyDb: lawOf(outsideCriterion(governing)).isEnergy ? evaluation.uncertaintyDb : null,
    whileWornDb: worn.levelDb,
    whileWornBound: worn.bound,
    verdictOutside: headline(outside),
    verdictAtEar: headline(atEar),
    word: evaluation.word,
    decidingTaskId: decidingTask?.taskId ?? null,
    decidingTaskName: decidingTask?.name ?? null,
    hasProtector: evaluation.tasks.some(({ isWorn }) => isWorn) ? "yes" : "no",
    reason:
      evaluation.protectorReason ??
      atEar.find(({ reason }) => reason)?.reason ??
      outside.find(({ reason }) => reason)?.reason ??
      null,
    ownTargetDb: ownTargetDb(input, governing),
    ruleSetKey: governing.key,
    ruleSetVersion: governing.version,
    governingCriteria: own.map(
      ({ criterionId, verdict, isClear, levelDb, dosePct, bound, reason }) => ({
        criterionId,
        verdict,
        isClear,
        levelDb,
        dosePct,
        bound,
        reason,
      }),
    ),
    dosePct: dose?.dosePct ?? null,
    doseBound: dose?.bound ?? "exact",
  };
}
