import type { RuleSetVersion } from "../../shared/acoustics/types";
import { ruleSetInForce } from "../../shared/rule-sets";
import { row } from "../lib/db";
import { AppError } from "../lib/errors";

export interface SettingsInForce {
  id: string;
  governingRuleSet: string;
  comparisonRuleSets: string[];
  wearFromDb: number;
  creditsActivePart: boolean;
  usesUncertainty: boolean;
  ruleSetVersion: number;
  /** The version in force of the governing rule set. */
  governing: RuleSetVersion;
}

/** What a site's verdicts rest on, on a date; null where the site had chosen no rule set yet. */
export async function rulesOn(siteId: string, date: string): Promise<SettingsInForce | null> {
  const found = await row<Omit<SettingsInForce, "ruleSetVersion" | "governing">>(
    `SELECT id, governing_rule_set AS "governingRuleSet", comparison_rule_sets AS "comparisonRuleSets", wear_from_db AS "wearFromDb",
       credits_active_part AS "creditsActivePart", uses_uncertainty AS "usesUncertainty"
     FROM site_settings WHERE site_id = :siteId AND effective_from <= :date ORDER BY effective_from DESC, number DESC LIMIT 1`,
    { siteId, date },
  );
  const ruleSet = found ? ruleSetInForce(found.governingRuleSet, date) : undefined;
  return found && ruleSet
    ? { ...found, ruleSetVersion: ruleSet.version, governing: ruleSet }
    : null;
}

/**
 * The same, where nothing can be said without.
 *
 * @throws AppError not-computed, where the site had chosen no rule set yet.
 */
export async function settingsInForce(siteId: string, date: string): Promise<SettingsInForce> {
  const found = await rulesOn(siteId, date);
  if (!found) throw new AppError("not-computed", 409);
  return found;
}
