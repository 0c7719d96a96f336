import type { Criterion, RuleSetVersion } from "../acoustics/types";
import { ACGIH_TLV } from "./acgih-tlv";
import { AUSTRALIA } from "./australia";
import { BRAZIL_NR_15 } from "./brazil-nr-15";
import { CANADA_FEDERAL } from "./canada-federal";
import { EU_2003_10_EC } from "./eu-2003-10-ec";
import { NIOSH_REL } from "./niosh-rel";
import { UK_2005 } from "./uk-2005";
import { US_CONSTRUCTION } from "./us-construction";
import { US_GENERAL_INDUSTRY } from "./us-general-industry";
import { US_MINING } from "./us-mining";

/** Every version of every rule set, in the order in which a site chooses them. */
export const RULE_SETS: readonly RuleSetVersion[] = [
  EU_2003_10_EC,
  UK_2005,
  US_GENERAL_INDUSTRY,
  US_CONSTRUCTION,
  US_MINING,
  NIOSH_REL,
  ACGIH_TLV,
  CANADA_FEDERAL,
  AUSTRALIA,
  BRAZIL_NR_15,
];

/** The version of a rule set in force on a local date, its last day included; undefined where none was. */
export function ruleSetInForce(key: string, date: string): RuleSetVersion | undefined {
  return RULE_SETS.find(
    (ruleSet) =>
      ruleSet.key === key &&
      ruleSet.effectiveFrom <= date &&
      (ruleSet.effectiveTo === null || date <= ruleSet.effectiveTo),
  );
}

export function ruleSetVersion(key: string, version: number): RuleSetVersion | undefined {
  return RULE_SETS.find((ruleSet) => ruleSet.key === key && ruleSet.version === version);
}

/**
 * The criterion that a rule set's picture hangs from: the daily limit at the ear where it has one, else its daily
 * limit without protection.
 *
 * @throws RangeError for a rule set without a daily limit.
 */
export function mainLimit(ruleSet: RuleSetVersion): Criterion {
  const limits = ruleSet.criteria.filter(
    (criterion) => criterion.kind === "limit" && criterion.quantity !== "lex-weekly",
  );
  const limit = limits.find((criterion) => criterion.judged === "at-the-ear") ?? limits[0];
  if (!limit) throw new RangeError(`Rule set ${ruleSet.key} has no daily limit`);
  return limit;
}

/** A criterion as an 8-hour level, dB. */
export const levelOf = (criterion: Criterion): number => criterion.levelDb ?? criterion.value;

export interface LimitAtEar {
  /** As an 8-hour level, dB. */
  readonly levelDb: number;
  readonly comparator: Criterion["comparator"];
  readonly kind: "limit" | "target";
}

/** The rule's own limit at the ear, else what a protector has to bring the day down to; null: it states neither. */
export function limitAtEar(
  ruleSet: RuleSetVersion,
  personalTargetDb: number | null,
): LimitAtEar | null {
  const limit = mainLimit(ruleSet);
  if (limit.judged === "at-the-ear")
    return { levelDb: levelOf(limit), comparator: limit.comparator, kind: "limit" };
  const { targetDb } = ruleSet.protection;
  if (targetDb === null) return null;
  return {
    levelDb: Math.min(targetDb, personalTargetDb ?? targetDb),
    comparator: "exceeds",
    kind: "target",
  };
}

/**
 * Where a rule has no scale for a protector that takes too much: the value from which EN 458's words stand beside its
 * own, dB: its action value, else its target. Null where the rule has that scale, or no word for a protector at all.
 */
export function besideScaleDb({ criteria, protection }: RuleSetVersion): number | null {
  if (protection.adequacy !== "appendix-b") return null;
  const action = criteria.find(({ kind }) => kind === "action");
  return action ? levelOf(action) : protection.targetDb;
}

/** The value from which the words for a protector hang, dB; null where the rule has no such scale. */
export function actionValueDb(ruleSet: RuleSetVersion): number | null {
  return ruleSet.protection.adequacy === "en-458" ? ruleSet.protection.targetDb : null;
}
