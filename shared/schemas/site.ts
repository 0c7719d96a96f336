import { z } from "zod";
import { Can, IsoDate, Language, Name, Reason } from "./common";
import { FitPolicyInput } from "./fit";

export const SiteSettingsFacts = z.object({
  effectiveFrom: IsoDate,
  governingRuleSet: z.string().min(1).max(80),
  comparisonRuleSets: z.array(z.string().min(1).max(80)).max(12).default([]),
  /** A protector counts as worn in tasks of this level or more. */
  wearFromDb: z.number().min(60).max(120).default(85),
  creditsActivePart: z.boolean().default(false),
  usesUncertainty: z.boolean().default(false),
});
export const SiteSettingsInput = SiteSettingsFacts.extend({ reason: Reason });
export type SiteSettingsInput = z.infer<typeof SiteSettingsInput>;

export const SiteInput = z.object({
  name: Name(200),
  timeZone: z.string().min(1).max(80),
  language: Language.default("en"),
  noticeDelayMin: z.number().int().min(0).max(1440).default(15),
});
export type SiteInput = z.infer<typeof SiteInput>;
export const NewSiteInput = SiteInput.extend({ settings: SiteSettingsFacts });

export const SiteView = SiteInput.extend({
  id: z.uuid(),
  revision: z.number(),
  fitPolicy: FitPolicyInput,
  settings: SiteSettingsFacts.extend({
    id: z.uuid(),
    number: z.number(),
    reason: z.string().nullable(),
  }),
  settingsHistory: z.array(
    SiteSettingsFacts.extend({
      id: z.uuid(),
      number: z.number(),
      reason: z.string().nullable(),
      authorName: z.string().nullable(),
      createdAt: z.string(),
    }),
  ),
  can: Can("change", "changeRules"),
});
export type SiteView = z.infer<typeof SiteView>;
/** `create`: of another site, and of roles at all of them. */
export const SiteList = z.object({ rows: z.array(SiteView), can: Can("create") });

export const AreaInput = z.object({
  siteId: z.uuid(),
  name: Name(200),
  zone: z.enum(["none", "single", "double"]).default("none"),
  isArchived: z.boolean().default(false),
});
export type AreaInput = z.infer<typeof AreaInput>;
export const AreaView = AreaInput.extend({
  id: z.uuid(),
  revision: z.number(),
  can: Can("change"),
});
export const AreaList = z.object({ rows: z.array(AreaView) });

/** Who would change verdict, before a change of rules or data is made. */
export const ChangePreview = z.object({
  days: z.number(),
  workers: z.number(),
  /** Days that become Over on either line. */
  overDays: z.number(),
  /** Days that become Can't tell yet on either line, and Over on neither. */
  cantTellDays: z.number(),
  /** Days that come to a state, per line, the gravest first: every day that was looked at is in it. */
  tally: z.array(
    z.object({
      line: z.enum(["without-protection", "at-the-ear", "protector"]),
      after: z.string(),
      days: z.number(),
    }),
  ),
  /** The same change of one worker, with its days; the gravest first. */
  changes: z.array(
    z.object({
      workerId: z.uuid(),
      workerName: z.string(),
      line: z.enum(["without-protection", "at-the-ear", "protector"]),
      before: z.string(),
      after: z.string(),
      days: z.number(),
      firstDate: IsoDate,
      lastDate: IsoDate,
    }),
  ),
  /** More than the list holds. */
  changesCount: z.number(),
  /** Days of which any line changes. */
  changedDays: z.number(),
  /** Who would be told by mail, of what is new or of what was told differently. */
  people: z.number(),
  /** Days concerned beyond those looked at, which are the latest; 0: all were. */
  tooMany: z.number(),
});
export type ChangePreview = z.infer<typeof ChangePreview>;

/** Days whose inputs have moved and whose result is still the earlier one. */
export const RecomputeProgress = z.object({ daysLeft: z.number() });
