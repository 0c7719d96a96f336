import { z } from "zod";
import { IsoDate, Language } from "./common";
import { FindingRow } from "./finding";
import { EntryNotices, NoticeRow } from "./notice";

export const WaitingQuery = z.object({ siteId: z.uuid().optional() });

/** How far a crew's day of today is entered. */
export const CrewProgress = z.object({
  id: z.uuid(),
  name: z.string(),
  siteId: z.uuid(),
  timeZone: z.string(),
  date: IsoDate,
  /** The day after it on which the crew works next, by the weekdays on which it has worked. */
  nextDate: IsoDate,
  start: z.string(),
  lengthMin: z.number(),
  members: z.number(),
  saved: z.number(),
  absent: z.number(),
});
export type CrewProgress = z.infer<typeof CrewProgress>;

/** The same for the days of one crew, at most a quarter of a year at once. */
export const CrewDaysQuery = z.object({ from: IsoDate, to: IsoDate }).check((context) => {
  const { from, to } = context.value;
  const days = (Date.parse(to) - Date.parse(from)) / 86_400_000;
  if (days < 0 || days > 92) {
    context.issues.push({
      code: "custom",
      input: to,
      path: ["to"],
      params: { code: "too-many-days", maximum: 92 },
    });
  }
});
export const CrewDays = z.object({
  rows: z.array(
    z.object({ date: IsoDate, members: z.number(), saved: z.number(), absent: z.number() }),
  ),
});

export const WaitingView = z.object({
  today: IsoDate,
  /** What governs each site in view today; a site that has chosen nothing yet is left out. */
  ruleSets: z.array(
    z.object({
      siteId: z.uuid(),
      siteName: z.string(),
      ruleSetKey: z.string(),
      ruleSetVersion: z.number(),
    }),
  ),
  crews: z.array(CrewProgress),
  findings: z.array(FindingRow),
  next: z.string().nullable(),
  toBeChecked: z.array(FindingRow),
  /** Letters of results to print or give by hand, and those that are late. */
  letters: z.object({ toPrint: z.number(), late: z.number() }),
  outgoing: z.array(EntryNotices),
  /** Not taken by the mail server, or nobody knows. */
  troubled: z.array(NoticeRow),
  calibrationsDue: z.array(z.object({ id: z.uuid(), name: z.string(), dueOn: IsoDate })),
  /** Steps of plans that are in the reader's own hands and due. */
  stepsDue: z.array(z.object({ id: z.uuid(), planId: z.uuid(), what: z.string(), dueOn: IsoDate })),
});
export type WaitingView = z.infer<typeof WaitingView>;

/** What is missing in a year, before it is exported. */
export const GapKind = z.enum([
  "not-measured",
  "no-protector",
  "not-fitted",
  "not-trained",
  "letter-late",
  "notice-late",
  "notice-not-sent",
  "not-assessed",
]);
export const YearQuery = z.object({
  siteId: z.uuid(),
  year: z.coerce.number().int().min(1970).max(2200),
});
/** Workers in the file by employee number, by name, or under names made up for the file. */
export const YearFileQuery = YearQuery.extend({
  workers: z.enum(["number", "name", "pseudonym"]).default("number"),
});
/** Without a language: the reader's own. */
export const YearDictionaryQuery = z.object({ language: Language.optional() });
export const GapsView = z.object({
  counts: z.array(
    z.object({
      kind: GapKind,
      count: z.number(),
      /** Of fit tests: the site states no interval, so whoever was never tested is counted. */
      hasNoInterval: z.literal(true).optional(),
    }),
  ),
  months: z.array(
    z.object({
      month: z.number(),
      days: z.number(),
      over: z.number(),
      cantTell: z.number(),
      notAssessed: z.number(),
      overOutside: z.number(),
      cantTellOutside: z.number(),
      protectorFault: z.number(),
      corrected: z.number(),
      medianAtEarDb: z.number().nullable(),
      medianOutsideDb: z.number().nullable(),
    }),
  ),
  years: z.array(z.number()),
  ruleSets: z.array(z.object({ key: z.string(), version: z.number() })),
});
export type GapsView = z.infer<typeof GapsView>;
export const GapNamesQuery = YearQuery.extend({ kind: GapKind });
export const GapNames = z.object({
  rows: z.array(
    z.object({
      id: z.uuid(),
      name: z.string(),
      employeeNumber: z.string(),
      note: z.string().nullable(),
      date: IsoDate.nullable(),
    }),
  ),
});
