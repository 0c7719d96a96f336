import { RULE_SETS } from "../../shared/rule-sets";
import { RuleSetList } from "../../shared/schemas/rule-set";
import { endpoint } from "../lib/endpoint";

export function defineRuleSetRoutes(): void {
  endpoint.get(
    "/rule-sets",
    {
      summary: "Rule sets with their criteria and citations",
      may: "signed-in",
      reply: RuleSetList,
    },
    () => ({ rows: [...RULE_SETS] }),
  );
}
