import type { CriterionResult, DayEvaluation, DayInput, RuleSetVersion } from "../acoustics/types";
import { summarizeDay } from "./summarize-day";

/** What a stored result says of an evaluated day, but for whose it is and what it rests on. */
export function resultFacts(input: DayInput, evaluation: DayEvaluation, governing: RuleSetVersion) {
  const { governingCriteria: _, ...summary } = summarizeDay(input, evaluation, governing);
  const isOwn = ({ ruleSetKey }: CriterionResult) => ruleSetKey === governing.key;
  return {
    ...summary,
    atEarOffDb: evaluation.atEarDb,
    atEarCountedDb: evaluation.counted?.atEarDb ?? null,
    methodVersion: evaluation.methodVersion,
    shiftMin: evaluation.shiftMin,
    unaccountedMin: evaluation.unaccountedMin,
    grade: evaluation.grade,
    isProjected: evaluation.isProjected,
    isKept: evaluation.keptReasons.length > 0,
    criteria: {
      governing: evaluation.criteria.filter(isOwn),
      comparison: evaluation.criteria.filter((result) => !isOwn(result)),
    },
  };
}
