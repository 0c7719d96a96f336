import { RULE_SETS } from "../../../shared/rule-sets";

/** Each rule set once, whatever its versions. */
export const ruleSetKeys = [
  ...new Map(RULE_SETS.map((ruleSet) => [ruleSet.key, ruleSet])).values(),
];
