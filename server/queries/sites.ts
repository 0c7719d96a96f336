import type { SiteView } from "../../shared/schemas/site";
import { rows } from "../lib/db";
import { groupBy } from "../lib/group-by";
import { type Actor, visible } from "../lib/policy";
import { sitePolicy } from "../policies";

export type SettingsRow = Omit<SiteView["settingsHistory"][number], "createdAt"> & {
  siteId: string;
  createdAt: Date;
};
export type SiteRow = Omit<SiteView, "can" | "settings" | "settingsHistory"> & {
  history: SettingsRow[];
};

/** SQL: how sure a fit has to be at a site `s`, and when it is tested again. */
export const FIT_POLICY = `json_build_object('confidencePct', s.fit_confidence_pct, 'everyMonths', s.fit_every_months,
  'afterFailDays', s.fit_after_fail_days, 'firstDays', s.fit_first_days)`;

/** Sites with all their settings, the latest first. */
export async function listSites(actor: Actor, id: string | null = null): Promise<SiteRow[]> {
  const found = await rows<Omit<SiteRow, "history">>(
    `SELECT s.id, s.name, s.time_zone AS "timeZone", s.language, s.notice_delay_min AS "noticeDelayMin", s.revision,
       ${FIT_POLICY} AS "fitPolicy"
     FROM sites s WHERE ${visible(sitePolicy, actor, "s")} AND (CAST(:id AS uuid) IS NULL OR s.id = :id)
     ORDER BY s.name`,
    { id },
  );
  if (found.length === 0) return [];
  const settings = await rows<SettingsRow>(
    `SELECT t.id, t.site_id AS "siteId", t.number, t.effective_from::text AS "effectiveFrom",
       t.governing_rule_set AS "governingRuleSet", t.comparison_rule_sets AS "comparisonRuleSets",
       t.wear_from_db AS "wearFromDb", t.credits_active_part AS "creditsActivePart", t.uses_uncertainty AS "usesUncertainty",
       t.reason, u.name AS "authorName", t.created_at AS "createdAt"
     FROM site_settings t LEFT JOIN users u ON u.id = t.author_id
     WHERE t.site_id IN (:ids) ORDER BY t.effective_from DESC, t.number DESC`,
    { ids: found.map((site) => site.id) },
  );
  const bySite = groupBy(settings, ({ siteId }) => siteId);
  return found.map((site) => ({ ...site, history: bySite.get(site.id) ?? [] }));
}
