import { type ExchangeLaw, isSameLaw, lawOf } from "./exchange-law";
import type { Criterion, RuleSetVersion } from "./types";

/**
 * The criterion whose level stands for the noise without protection: the first action value, whose threshold hides
 * least, else the limit.
 */
export function outsideCriterion(ruleSet: RuleSetVersion): Criterion {
  let limit: Criterion | undefined;
  for (const criterion of ruleSet.criteria) {
    const { quantity, kind } = criterion;
    if (quantity === "slow-maximum" || quantity === "peak" || quantity === "lex-weekly") continue;
    if (criterion.judged === "without-protection" && kind === "action") return criterion;
    if (kind === "limit") limit ??= criterion;
  }
  if (!limit) throw new RangeError(`Rule set ${ruleSet.key} has neither action value nor limit`);
  return limit;
}

/** Under a protector no threshold acts, and no table is read. @source osha-1910.95 App. B */
export const lawAtEar = (ruleSet: RuleSetVersion): ExchangeLaw => ({
  ...lawOf(outsideCriterion(ruleSet)),
  table: null,
  thresholdDb: null,
});

/** Both criteria are about one and the same number of a day: one figure may stand for both. */
export function isSameFigure(a: Criterion, b: Criterion): boolean {
  if (a.quantity !== b.quantity || a.judged !== b.judged) return false;
  return a.quantity === "slow-maximum" || a.quantity === "peak"
    ? a.peakWeighting === b.peakWeighting
    : isSameLaw(lawOf(a), lawOf(b));
}
