import { z } from "zod";
import { Can, Language, PageQuery, pageOf } from "./common";
import { GapsView, YearQuery } from "./waiting";

/** Without a language: the worker's own. */
export const ExposureRecordQuery = z.object({ language: Language.optional() });

const Verdicts = z.object({
  under: z.number(),
  over: z.number(),
  cantTell: z.number(),
  notAssessed: z.number(),
});

/** Why a day's result is another than in the report before. */
export const CHANGE_CAUSES = [
  "correction",
  "measured-anew",
  "protector-data",
  "wearing-seen",
  "rule",
  "other",
] as const;
export const ChangeCause = z.enum(CHANGE_CAUSES);
export type ChangeCause = z.infer<typeof ChangeCause>;

/** What a report of a site's year states, as it was when it was issued. Levels in dB, counts of people and of days. */
export const YearReportFigures = z.object({
  people: z.object({
    withDay: z.number(),
    /** Over 80 dB without protection on a day of the year. */
    inNoise: z.number(),
    /** On no day is any level known. */
    levelUnknown: z.number(),
    /** Of those in noise: with a run of their own in the year. */
    measured: z.number(),
    /** Not themselves, but by measurements that speak for them on a day. */
    byGroup: z.number(),
    /** By estimates and levels of tasks alone. */
    neverMeasured: z.number(),
    /** Of those in noise: with a day that is open or not assessed. */
    undecided: z.number(),
    /** Of those in noise: with a day over at the ear; null: no rule of the year judges there. */
    overAtEar: z.number().nullable(),
  }),
  days: z.object({
    count: z.number(),
    outside: Verdicts,
    /** Null: no rule of the year judges there. */
    atEar: Verdicts.nullable(),
  }),
  /** Days by level, in steps of 2 dB from `fromDb` on. */
  histogram: z.array(z.object({ fromDb: z.number(), outside: z.number(), atEar: z.number() })),
  months: GapsView.shape.months,
  gaps: GapsView.shape.counts,
  ruleSets: GapsView.shape.ruleSets,
  findings: z.object({
    opened: z.number(),
    closed: z.number(),
    open: z.number(),
    overdue: z.number(),
  }),
  /** Null: it is the first. */
  changes: z
    .object({
      since: z.object({ number: z.number(), asOf: z.string() }),
      newDays: z.number(),
      goneDays: z.number(),
      changedDays: z.number(),
      /** Of these: with another verdict on either line. */
      verdictDays: z.number(),
      byCause: z.array(
        z.object({
          cause: ChangeCause,
          days: z.number(),
          verdictDays: z.number(),
          nowOver: z.number(),
          noLongerOver: z.number(),
        }),
      ),
    })
    .nullable(),
});
export type YearReportFigures = z.infer<typeof YearReportFigures>;

export const YearReportInput = YearQuery.extend({ year: z.number().int().min(1970).max(2200) });
export type YearReportInput = z.infer<typeof YearReportInput>;
export const YearReportFilter = PageQuery.extend(YearQuery.shape);

export const YearReportRow = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  year: z.number(),
  number: z.number(),
  asOf: z.string(),
  authorName: z.string(),
  resultsCount: z.number(),
  /** Of the ids of the results that it rests on. */
  resultsSha256: z.string(),
});
export type YearReportRow = z.infer<typeof YearReportRow>;
export const YearReportPage = pageOf(YearReportRow).extend({ can: Can("issue") });
