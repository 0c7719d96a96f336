import type { SiteSettingsInput } from "../../shared/schemas/site";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import { checkSettings } from "./check-site";
import { markDaysStale } from "./mark-days-stale";

/** New rules for a site from a date on; the days since then are judged again. */
export async function addSiteSettings(
  actor: Actor,
  site: Site,
  input: SiteSettingsInput,
): Promise<void> {
  checkSettings(input);
  await insertSettings(actor, site, input);
  await recordAudit(actor, {
    action: "add-site-settings",
    subjectKind: "site",
    subjectId: site.id,
    values: input,
  });
  await markDaysStale(actor.organizationId, { siteId: site.id, fromDate: input.effectiveFrom });
}

/** The site's row is locked by whoever calls, so that numbers follow one another. */
export async function insertSettings(
  actor: Actor,
  site: Site,
  settings: Omit<SiteSettingsInput, "reason"> & { reason: string | null },
): Promise<void> {
  await execute(
    `INSERT INTO site_settings (organization_id, site_id, number, effective_from, governing_rule_set, comparison_rule_sets,
       wear_from_db, credits_active_part, uses_uncertainty, reason, author_id)
     SELECT $1::uuid, $2::uuid, coalesce(max(number), 0) + 1, $3::date, $4::text, $5::text[], $6::float8, $7::boolean,
       $8::boolean, $9::text, $10::uuid FROM site_settings WHERE site_id = $2::uuid`,
    [
      actor.organizationId,
      site.id,
      settings.effectiveFrom,
      settings.governingRuleSet,
      settings.comparisonRuleSets,
      settings.wearFromDb,
      settings.creditsActivePart,
      settings.usesUncertainty,
      settings.reason,
      actor.userId,
    ],
  );
}
