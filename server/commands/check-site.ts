import { ruleSetInForce } from "../../shared/rule-sets";
import type { ProblemIssue } from "../../shared/schemas/problem";
import type { SiteSettingsInput } from "../../shared/schemas/site";
import { dateIssues } from "../lib/calendar";
import { row } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";

type SettingsFacts = Omit<SiteSettingsInput, "reason">;

/** @throws AppError invalid, where a rule set is not in force on the first day, or is named twice. */
export function checkSettings(settings: SettingsFacts, under: string[] = []): void {
  const { effectiveFrom, governingRuleSet, comparisonRuleSets } = settings;
  const issues = dateIssues([...under, "effectiveFrom"], effectiveFrom);
  const needsInForce = (key: string, path: ProblemIssue["path"]) => {
    if (ruleSetInForce(key, effectiveFrom)) return;
    issues.push(issue([...under, ...path], "rule-set-not-in-force", { key, date: effectiveFrom }));
  };
  needsInForce(governingRuleSet, ["governingRuleSet"]);
  comparisonRuleSets.forEach((key, index) => {
    const path = ["comparisonRuleSets", index];
    needsInForce(key, path);
    const isNamedAlready = key === governingRuleSet || comparisonRuleSets.indexOf(key) < index;
    if (isNamedAlready) issues.push(issue([...under, ...path], "rule-set-twice", { key }));
  });
  if (issues.length > 0) throw unprocessable(issues);
}

/** @throws AppError invalid, unless the runtime and the database both know the zone. */
export async function checkTimeZone(timeZone: string): Promise<void> {
  const known = await row("SELECT 1 AS one FROM pg_timezone_names WHERE name = :timeZone", {
    timeZone,
  });
  if (!known || !isKnownHere(timeZone))
    throw unprocessable([issue(["timeZone"], "time-zone-unknown")]);
}

function isKnownHere(timeZone: string): boolean {
  try {
    new Intl.DateTimeFormat("en", { timeZone });
    return true;
  } catch {
    return false;
  }
}
