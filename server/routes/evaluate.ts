import { evaluateRequest, RuleSetNotInForce } from "../../shared/day/evaluate-request";
import { RULE_SETS } from "../../shared/rule-sets";
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
    ({ body }) => {
      try {
        return evaluateRequest(body);
      } catch (error) {
        if (!(error instanceof RuleSetNotInForce)) throw error;
        const { path, key, date } = error;
        const isKnown = RULE_SETS.some((ruleSet) => ruleSet.key === key);
        throw unprocessable([
          isKnown
            ? issue(path, "rule-set-not-in-force", { key, date })
            : issue(path, "rule-set-unknown", { key }),
        ]);
      }
    },
  );
}
