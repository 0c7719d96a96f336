import { evaluateDay } from "../../shared/acoustics/day";
import { buildWorking } from "../../shared/acoustics/working";
import { ruleSetInForce } from "../../shared/rule-sets";
import { EvaluateInput, EvaluateView } from "../../shared/schemas/evaluation";
import { endpoint } from "../lib/endpoint";
import { issue, unprocessable } from "../lib/errors";

export function defineEvaluateRoutes(): void {
  endpoint.post(
    "/evaluate",
    {
      summary: "Compute a worker's day without storing it",
      may: "signed-in",
      body: EvaluateInput,
      reply: EvaluateView,
      storesNothing: true,
    },
    ({ body }) => evaluate(body),
  );
}

/** The same for the API and for the command line: the record's own engine on a whole day. */
export function evaluate({
  day,
  governingRuleSet,
  comparisonRuleSets,
  withWorking,
}: EvaluateInput) {
  const find = (key: string, path: (string | number)[]) => {
    const found = ruleSetInForce(key, day.date);
    if (!found)
      throw unprocessable([issue(path, "rule-set-not-in-force", { key, date: day.date })]);
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
