import type { Criterion, RuleSetVersion } from "../acoustics/types";

/** How soon a worker has to be told what was measured on them. */
export interface ResultNotice {
  /** Calendar days after the day that was measured. */
  readonly withinDays: number;
  /** What names the days; null where the rule names none and the number is the program's own. */
  readonly citation: string | null;
  readonly sourceStatus: "read" | "from-memory";
}

/** Where the rule set says that workers are told, and not when. */
const PROMPTLY: ResultNotice = { withinDays: 14, citation: null, sourceStatus: "from-memory" };

const BY_RULE_SET: Readonly<Record<string, ResultNotice>> = {
  "us-mining": { withinDays: 15, citation: "30 CFR 62.110(d)", sourceStatus: "from-memory" },
};

/** When the result of a measurement is due with the worker under a rule set. */
export const resultNoticeOf = (ruleSetKey: string): ResultNotice =>
  BY_RULE_SET[ruleSetKey] ?? PROMPTLY;

/**
 * The daily criteria whose reaching makes a result the worker's to know, the highest first: the rule set's action values,
 * or its daily limits without protection where it has none.
 */
export function tellingCriteria(ruleSet: RuleSetVersion): Criterion[] {
  const daily = ruleSet.criteria.filter(
    ({ quantity, judged }) =>
      judged === "without-protection" && ["lex-8h", "dose", "table-dose"].includes(quantity),
  );
  const actions = daily.filter(({ kind }) => kind === "action");
  const telling = actions.length > 0 ? actions : daily.filter(({ kind }) => kind === "limit");
  return telling.toSorted((a, b) => b.value - a.value);
}
