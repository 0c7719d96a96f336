import type { SiteView } from "../../shared/schemas/site";
import { todayAt } from "../lib/calendar";
import { type Actor, abilities } from "../lib/policy";
import { sitePolicy } from "../policies";
import type { SettingsRow, SiteRow } from "../queries/sites";

function presentSettings(row: SettingsRow) {
  return {
    id: row.id,
    number: row.number,
    effectiveFrom: row.effectiveFrom,
    governingRuleSet: row.governingRuleSet,
    comparisonRuleSets: row.comparisonRuleSets,
    wearFromDb: row.wearFromDb,
    creditsActivePart: row.creditsActivePart,
    usesUncertainty: row.usesUncertainty,
    reason: row.reason,
  };
}

export function presentSite(actor: Actor, row: SiteRow): SiteView {
  const today = todayAt(row.timeZone);
  // A site that opens later has settings, but none in force yet: its first ones stand for what will be.
  const settings =
    row.history.find(({ effectiveFrom }) => effectiveFrom <= today) ?? row.history.at(-1);
  if (!settings) throw new Error("a site has settings from its first day on");
  return {
    id: row.id,
    name: row.name,
    timeZone: row.timeZone,
    language: row.language,
    noticeDelayMin: row.noticeDelayMin,
    revision: row.revision,
    fitPolicy: row.fitPolicy,
    settings: presentSettings(settings),
    settingsHistory: row.history.map((version) => ({
      ...presentSettings(version),
      authorName: version.authorName,
      createdAt: version.createdAt.toISOString(),
    })),
    can: abilities(sitePolicy, actor, row),
  };
}
