import type { CriterionResult, RuleSetVersion } from "../acoustics/types";
import { isPast } from "../acoustics/verdict";

interface ImportedLevels {
  /** 8-hour level without protection, dB: LEX,8h, or TWA where the rule set judges a dose. */
  outsideDb: number | null;
  atEarDb: number | null;
}

/**
 * Verdicts on a day of which only levels are known. A level serves a criterion on the 8-hour level; one on a dose only
 * where all doses of its rule set are taken under one threshold, else nobody knows which of them the level means.
 */
export function judgeImported(
  { outsideDb, atEarDb }: ImportedLevels,
  ruleSet: RuleSetVersion,
): CriterionResult[] {
  const doses = ruleSet.criteria.filter(({ quantity }) => quantity === "dose");
  const isOneDose =
    new Set(doses.map(({ thresholdDb, exchangeRateDb }) => `${thresholdDb} ${exchangeRateDb}`))
      .size === 1;
  return ruleSet.criteria.map((criterion) => {
    const { quantity, judged, comparator, value } = criterion;
    const limitDb =
      quantity === "lex-8h" ? value : quantity === "dose" && isOneDose ? criterion.levelDb : null;
    const levelDb = limitDb === null ? null : judged === "at-the-ear" ? atEarDb : outsideDb;
    const verdict =
      levelDb === null || limitDb === null
        ? "not-assessed"
        : isPast(levelDb, limitDb, comparator)
          ? "over"
          : "under";
    return {
      ruleSetKey: ruleSet.key,
      ruleSetVersion: ruleSet.version,
      criterionId: criterion.id,
      judged,
      levelDb,
      dosePct: null,
      bound: "exact",
      basis: "tasks",
      uncertaintyDb: null,
      verdict,
      isClear: false,
      reason: levelDb === null ? "imported" : null,
    };
  });
}
