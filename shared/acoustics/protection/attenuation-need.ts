import type { RuleSetVersion } from "../types";

/** EN 458: this far below the action value a protector begins to be too much, dB. @source en-458 Annex A */
const TOO_MUCH_BELOW_DB = 15;

/** What a noise asks of a protector, dB. */
export interface Need {
  /** Off the A-weighted level, at least; 0 where the noise lies within the target already. */
  readonly needDb: number;
  readonly targetDb: number;
  /** The most that may come off before it is too much; null: the rule has no such scale. */
  readonly mostDb: number | null;
}

/**
 * What must come off an outside level for the ear to stay within its target, dB: EN 458's action value or Appendix B's
 * target, and this worker's own where it is stricter. Null where the rule states none and the worker has none.
 *
 * By EN 458 the level is a task's, by Appendix B the shift's TWA.
 *
 * @source en-458 Annex A
 * @source osha-1910.95 App. B, (j)(2), (j)(3)
 */
export function attenuationNeed(
  outsideDb: number,
  rule: Pick<RuleSetVersion["protection"], "adequacy" | "targetDb">,
  personalTargetDb: number | null,
): Need | null {
  const ofRuleDb = rule.adequacy === "not-stated" ? null : rule.targetDb;
  if (ofRuleDb === null && personalTargetDb === null) return null;
  const targetDb = Math.min(
    ofRuleDb ?? Number.POSITIVE_INFINITY,
    personalTargetDb ?? Number.POSITIVE_INFINITY,
  );
  const needDb = Math.max(0, outsideDb - targetDb);
  return {
    needDb,
    targetDb,
    mostDb:
      rule.adequacy === "en-458" ? Math.max(0, outsideDb - targetDb + TOO_MUCH_BELOW_DB) : null,
  };
}
