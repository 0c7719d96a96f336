import { z } from "zod";
import { AtSiteQuery, IsoDate, PageQuery, pageOf } from "./common";
import { FindingKind } from "./finding";

/** What can be due at a site, in the order in which it is named. */
export const DUTY_KINDS = [
  "finding",
  "measure",
  "notice",
  "monitoring",
  "calibration",
  "fit-test",
  "cushions",
  "training",
] as const;
export const DutyKind = z.enum(DUTY_KINDS);
export type DutyKind = z.infer<typeof DutyKind>;

export const DutyItem = z.object({
  /** The same every time it is asked for: kind, and what it is about. */
  key: z.string(),
  kind: DutyKind,
  siteId: z.uuid(),
  siteName: z.string(),
  dueOn: IsoDate,
  /** Before today at the site. */
  isOverdue: z.boolean(),
  worker: z.object({ id: z.uuid(), name: z.string() }).nullable(),
  /** Instrument, protector, change or measure, in its own words. */
  what: z.string().nullable(),
  /** The finding, instrument, change, letter or training worker it leads to. */
  targetId: z.uuid(),
  findingKind: FindingKind.nullable(),
  /** Rule set and criterion of a finding. */
  criterion: z.string().nullable(),
  /** Rule set in force at the site today. */
  ruleSetKey: z.string().nullable(),
});
export type DutyItem = z.infer<typeof DutyItem>;
export const DutyPage = pageOf(DutyItem);

export const DutyFilter = PageQuery.extend({
  ...AtSiteQuery.shape,
  kind: DutyKind.optional(),
  from: IsoDate.optional(),
  to: IsoDate.optional(),
});

/** A private calendar address: when it was made; null where there is none. Its text is shown once, as it is made. */
export const CalendarFeedView = z.object({ madeAt: z.string().nullable() });
export const CalendarFeedMade = CalendarFeedView.extend({ address: z.string() });
