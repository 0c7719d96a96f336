import { SITE_TIME_ZONE } from "./days";
import { insert, next } from "./insert";
import { buildOrganization } from "./organization";

export interface Site {
  id: string;
  organizationId: string;
  name: string;
}

interface SiteOverrides {
  organizationId?: string;
  name?: string;
  timeZone?: string;
  noticeDelayMin?: number;
  governingRuleSet?: string;
  comparisonRuleSets?: string[];
  wearFromDb?: number;
  usesUncertainty?: boolean;
  creditsActivePart?: boolean;
  effectiveFrom?: string;
}

/** A site with its first rules. */
export async function buildSite(overrides: SiteOverrides = {}): Promise<Site> {
  const organizationId = overrides.organizationId ?? (await buildOrganization()).id;
  const name = overrides.name ?? `Site ${next()}`;
  const { timeZone = SITE_TIME_ZONE, noticeDelayMin = 15 } = overrides;
  const id = await insert("sites", { organizationId, name, timeZone, noticeDelayMin });
  await insert("site_settings", {
    organizationId,
    siteId: id,
    number: 1,
    effectiveFrom: overrides.effectiveFrom ?? "2020-01-01",
    governingRuleSet: overrides.governingRuleSet ?? "eu-2003-10-ec",
    comparisonRuleSets: overrides.comparisonRuleSets ?? [],
    wearFromDb: overrides.wearFromDb,
    usesUncertainty: overrides.usesUncertainty,
    creditsActivePart: overrides.creditsActivePart,
  });
  return { id, organizationId, name };
}

export interface Area {
  id: string;
  organizationId: string;
  siteId: string;
  name: string;
}

interface AreaOverrides {
  site?: Site;
  name?: string;
  zone?: "none" | "single" | "double";
}

export async function buildArea(overrides: AreaOverrides = {}): Promise<Area> {
  const site = overrides.site ?? (await buildSite());
  const name = overrides.name ?? `Area ${next()}`;
  const { organizationId, id: siteId } = site;
  const id = await insert("areas", {
    organizationId,
    siteId,
    name,
    zone: overrides.zone ?? "none",
  });
  return { id, organizationId, siteId, name };
}
