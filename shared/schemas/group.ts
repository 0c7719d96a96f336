import { z } from "zod";
import { IsoDate } from "./common";
import { InstrumentClassName } from "./evaluation";
import { ObservedDuration, Strategy } from "./survey";

/** What a group's figures are taken from: days measured on its workers, or the samples of a survey. */
export const GroupQuery = z.object({ surveyId: z.uuid().optional() });

const WorkerRef = z.object({
  workerId: z.uuid().nullable(),
  /** Null: not theirs to know, or of nobody. */
  workerName: z.string().nullable(),
});

export const BudgetView = z.object({
  strategy: Strategy,
  lexDb: z.number(),
  combinedDb: z.number(),
  expandedDb: z.number(),
  scatterDb: z.number().nullable(),
  isScatterLarge: z.boolean(),
  items: z.array(
    z.object({
      source: z.enum(["sampling", "duration", "instrument", "position"]),
      taskId: z.uuid().nullable(),
      contributionDb: z.number(),
      sharePct: z.number(),
    }),
  ),
  narrowings: z.array(
    z.object({
      change: z.discriminatedUnion("kind", [
        z.object({
          kind: z.literal("more-samples"),
          taskId: z.uuid().nullable(),
          count: z.number(),
        }),
        z.object({ kind: z.literal("instrument"), instrument: InstrumentClassName }),
        z.object({
          kind: z.literal("duration"),
          taskId: z.uuid(),
          durationUncertaintyMin: z.number(),
        }),
      ]),
      expandedDb: z.number(),
      decreaseDb: z.number(),
    }),
  ),
});
export type BudgetView = z.infer<typeof BudgetView>;

export const GroupBudgetView = z.object({
  /** Null: the nominal day with the levels in force. */
  surveyId: z.uuid().nullable(),
  surveyName: z.string().nullable(),
  budget: BudgetView.nullable(),
  /** Why there is none, and the tasks that lack what it takes. */
  reason: z.string().nullable(),
  lackingTaskIds: z.array(z.uuid()),
  keptReasons: z.array(z.string()),
  /** Samples under an instrument's range that enter with the level they stayed under. */
  belowRangeCount: z.number(),
  /** A survey's, and the same as with the levels in force. */
  isAsInForce: z.boolean(),
});
export type GroupBudgetView = z.infer<typeof GroupBudgetView>;

export const GroupStatistics = z.object({
  sampleCount: z.number(),
  belowCount: z.number(),
  workerCount: z.number(),
  meanDb: z.number().nullable(),
  sdDb: z.number().nullable(),
  energyMeanDb: z.number().nullable(),
  toleranceFactor: z.number().nullable(),
  toleranceLimitDb: z.number().nullable(),
  exceedances: z.array(
    z.object({
      levelDb: z.number(),
      /** Of the criterion, a key of the catalogue. */
      label: z.string(),
      share: z.number(),
      shareUpTo: z.number(),
    }),
  ),
  reasons: z.array(z.string()),
  plot: z.array(WorkerRef.extend({ levelDb: z.number(), share: z.number(), z: z.number() })),
  outliers: z.object({
    workers: z.array(
      WorkerRef.extend({
        sampleCount: z.number(),
        meanDb: z.number(),
        distance: z.number().nullable(),
        isOutlier: z.boolean(),
      }),
    ),
    critical: z.number().nullable(),
    leftAsideCount: z.number(),
  }),
  belonging: z.object({
    verdict: z.enum(["differ", "no-difference-shown", "cant-tell"]),
    reason: z.string().nullable(),
    workerCount: z.number(),
    sampleCount: z.number(),
    betweenDb: z.number().nullable(),
    withinDb: z.number().nullable(),
    betweenShare: z.number().nullable(),
    workerSpanDb: z.number().nullable(),
    f: z.number().nullable(),
    probability: z.number().nullable(),
  }),
});
export type GroupStatistics = z.infer<typeof GroupStatistics>;

/** What samples say in one quantity: LEX,8h, or the TWA of a dose by one exchange rate and threshold. */
export const GroupBlock = z.object({
  quantity: z.enum(["lex-8h", "dose", "table-dose"]),
  /** Of a dose; null for LEX,8h. */
  exchangeRateDb: z.number().nullable(),
  thresholdDb: z.number().nullable(),
  /** Days of which only a lower bound is known, and so can't be counted here. */
  leftOutCount: z.number(),
  /** Null: no sample. */
  statistics: GroupStatistics.nullable(),
});
export type GroupBlock = z.infer<typeof GroupBlock>;

export const GroupView = z.object({
  jobId: z.uuid(),
  jobName: z.string(),
  siteId: z.uuid(),
  siteName: z.string(),
  workersCount: z.number(),
  ruleSetTitle: z.string(),
  nominalDay: z.array(
    z.object({
      taskId: z.uuid(),
      taskName: z.string(),
      durationMin: z.number(),
      levelDb: z.number().nullable(),
      observed: ObservedDuration.nullable(),
    }),
  ),
  budgets: z.array(GroupBudgetView),
  /** Surveys whose samples are each one of a whole day of work. */
  surveys: z.array(z.object({ id: z.uuid(), name: z.string() })),
  basis: z.object({
    surveyId: z.uuid().nullable(),
    fromDate: IsoDate.nullable(),
    /** Samples of the survey that do not count. */
    leftOutCount: z.number(),
    keptReasons: z.array(z.string()),
  }),
  /** A survey's energy levels under rules that count doses: no share above their values can be stated. */
  isOtherQuantity: z.boolean(),
  /** One for each quantity that the rules judge a day without protection by; of a survey LEX,8h alone. */
  blocks: z.array(GroupBlock).min(1),
});
export type GroupView = z.infer<typeof GroupView>;
