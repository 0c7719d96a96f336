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

/** Columns of a stored result and the members of `resultFacts` that fill them, with their types. */
export const RESULT_COLUMNS = {
  governing_rule_set: ["ruleSetKey", "text"],
  governing_version: ["ruleSetVersion", "int"],
  method_version: ["methodVersion", "int"],
  shift_min: ["shiftMin", "float8"],
  unaccounted_min: ["unaccountedMin", "float8"],
  grade: ["grade", "text"],
  is_projected: ["isProjected", "boolean"],
  is_kept: ["isKept", "boolean"],
  outside_db: ["outsideDb", "float8"],
  outside_bound: ["outsideBound", "text"],
  at_ear_db: ["atEarOffDb", "float8"],
  at_ear_counted_db: ["atEarCountedDb", "float8"],
  at_ear_bound: ["atEarBound", "text"],
  at_ear_active_db: ["atEarActiveDb", "float8"],
  at_ear_as_worked_db: ["atEarAsWorkedDb", "float8"],
  uncertainty_db: ["uncertaintyDb", "float8"],
  dose_pct: ["dosePct", "float8"],
  dose_bound: ["doseBound", "text"],
  while_worn_db: ["whileWornDb", "float8"],
  while_worn_bound: ["whileWornBound", "text"],
  verdict_outside: ["verdictOutside", "text"],
  verdict_at_ear: ["verdictAtEar", "text"],
  word: ["word", "text"],
  deciding_task_id: ["decidingTaskId", "uuid"],
  has_protector: ["hasProtector", "text"],
  reason: ["reason", "text"],
  own_target_db: ["ownTargetDb", "float8"],
  criteria: ["criteria", "jsonb"],
} as const satisfies Record<string, readonly [keyof ReturnType<typeof resultFacts>, string]>;
