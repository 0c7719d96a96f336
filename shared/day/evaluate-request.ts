import { evaluateDay } from "../acoustics/day";
import { buildWorking } from "../acoustics/working";
import { ruleSetInForce } from "../rule-sets";
import type { EvaluateInput } from "../schemas/evaluation";

/** A rule set that a request names was not in force on its date. */
export class RuleSetNotInForce extends RangeError {
  constructor(
    readonly key: string,
    readonly date: string,
    /** Of the field, in the request. */
    readonly path: (string | number)[],
  ) {
    super(`the rule set ${key} was not in force on ${date}`);
  }
}

/**
 * The record's own engine on a whole day that is not stored: the same for the API and for the command line.
 *
 * @throws RuleSetNotInForce
 */
export function evaluateRequest({
  day,
  governingRuleSet,
  comparisonRuleSets,
  withWorking,
}: EvaluateInput) {
  const find = (key: string, path: (string | number)[]) => {
    const found = ruleSetInForce(key, day.date);
    if (!found) throw new RuleSetNotInForce(key, day.date, path);
    return found;
  };
  const governing = find(governingRuleSet, ["governingRuleSet"]);
  const comparison = comparisonRuleSets.map((key, index) =>
    find(key, ["comparisonRuleSets", index]),
  );
  const evaluation = evaluateDay(day, governing, comparison);
  return {
    evaluation,
    working: withWorking ? buildWorking(day, governing, comparison, evaluation) : null,
  };
}
