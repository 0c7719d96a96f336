import { z } from "zod";
import { planTaskSampling } from "../acoustics/survey-plan";
import { minimumGroupMeasuringH } from "../acoustics/uncertainty";
import { Can, IsoDate, LevelDb, Name, PageQuery, pageOf, Reason } from "./common";
import { InstrumentClassName, OctaveBands } from "./evaluation";
import { LEAST_SAMPLE_MIN } from "./run-doubts";
import { ProtectorsToReview } from "./workplace-change";

export const Strategy = z.enum(["task", "job", "full-day"]);
export type Strategy = z.infer<typeof Strategy>;
export const SurveyState = z.enum(["planned", "measuring", "done", "struck"]);

/** What article 4(6) of Directive 2003/10/EC asks to be looked at beside the level. */
export const RISK_FACTORS = [
  "impulse",
  "vibration",
  "ototoxic-substances",
  "warning-signals",
] as const;
const RiskAnswer = z.object({
  answer: z.enum(["yes", "no"]).nullable(),
  note: z.string().trim().max(500),
});
export const RiskFactors = z.object({
  impulse: RiskAnswer,
  vibration: RiskAnswer,
  "ototoxic-substances": RiskAnswer,
  "warning-signals": RiskAnswer,
});
export type RiskFactors = z.infer<typeof RiskFactors>;

const TargetFacts = z.object({
  /** Null: the job as a whole. */
  taskId: z.uuid().nullable(),
  samplesCount: z.number().int().min(1).max(200),
  sampleMin: z.number().positive().max(1440),
  /** How the noise of the task runs: it decides how long a sample lasts. */
  pattern: z.enum(["steady", "cyclic", "fluctuating"]).default("steady"),
  cycleMin: z.number().positive().max(1440).nullable().default(null),
});
export const SurveyTarget = TargetFacts.check((context) => {
  const { pattern, cycleMin } = context.value;
  const code =
    pattern === "cyclic" && cycleMin === null
      ? "cycle-needed"
      : pattern !== "cyclic" && cycleMin !== null
        ? "cycle-of-cyclic-only"
        : null;
  if (code)
    context.issues.push({
      code: "custom",
      input: context.value,
      path: ["cycleMin"],
      params: { code },
    });
});
export type SurveyTarget = z.infer<typeof SurveyTarget>;

/**
 * Minutes that a sample of a target lasts at the least: as planned, and never less than the standard asks. A full day is
 * as long as it was planned: the standard asks for as much of it as can be.
 *
 * @source iso-9612-2009 9.3, 10.2 Table 1
 */
export function leastSampleMin(
  strategy: Strategy,
  { sampleMin, samplesCount, pattern, cycleMin }: Omit<SurveyTarget, "taskId">,
  /** Of the task in the nominal day; null where it is not in it. */
  nominalMin: number | null,
  groupSize: number,
): number {
  if (strategy === "full-day") return sampleMin;
  if (strategy === "job")
    return Math.max(
      sampleMin,
      (60 * minimumGroupMeasuringH(Math.max(1, groupSize))) / samplesCount,
    );
  const asked =
    nominalMin === null
      ? LEAST_SAMPLE_MIN
      : planTaskSampling({ durationMin: nominalMin, pattern, cycleMin, samplesDb: [] }).sampleMin;
  return Math.max(sampleMin, asked);
}
export const SurveyPerson = z.object({
  workerId: z.uuid(),
  part: z.enum(["drawn", "reserve", "named"]),
});
export const Reservation = z
  .object({ instrumentId: z.uuid(), fromDate: IsoDate, toDate: IsoDate })
  .refine(({ fromDate, toDate }) => toDate >= fromDate, {
    path: ["toDate"],
    params: { code: "ends-before-it-starts" },
  });

const SurveyFacts = z.object({
  name: Name(120),
  purpose: z.string().trim().max(2000).default(""),
  strategy: Strategy,
  fromDate: IsoDate,
  toDate: IsoDate,
  drawSeed: z.string().min(1).max(60),
  observers: z.array(Name(120)).max(20).default([]),
  riskFactors: RiskFactors,
  targets: z.array(SurveyTarget).min(1).max(24),
  people: z.array(SurveyPerson).max(200).default([]),
  reservations: z.array(Reservation).max(40).default([]),
});
const inOrder = ({ fromDate, toDate }: { fromDate: string; toDate: string }) => toDate >= fromDate;
const order = { path: ["toDate"], params: { code: "ends-before-it-starts" } };

export const SurveyInput = SurveyFacts.extend({ siteId: z.uuid(), jobId: z.uuid() }).refine(
  inOrder,
  order,
);
export type SurveyInput = z.infer<typeof SurveyInput>;
export const SurveyChange = SurveyFacts.refine(inOrder, order);
export type SurveyChange = z.infer<typeof SurveyChange>;
export const SurveyStateChange = z.object({
  state: SurveyState,
  /** Needed to strike a survey. */
  note: Reason.nullable().default(null),
});

/** What the standard asks of a survey of this group: a proposal, computed and not stored. */
export const SurveyPlanQuery = z.object({
  siteId: z.uuid(),
  jobId: z.uuid(),
  strategy: Strategy.optional(),
  seed: z.string().min(1).max(60).optional(),
});

/** What the shifts of the last months really had of a task: those with it, out of all of the group. */
export const ObservedDuration = z.object({
  count: z.number(),
  meanMin: z.number(),
  /** Null below two shifts. */
  sdMin: z.number().nullable(),
  shiftsCount: z.number(),
});
export type ObservedDuration = z.infer<typeof ObservedDuration>;
/** Codes of what the standard asks for, each with its clause. */
export const PlanReasons = z.array(
  z.object({ code: z.string(), clause: z.string(), isRevisedIn2025: z.boolean() }),
);
export const SurveyPlan = z.object({
  strategy: Strategy,
  /** What is preselected, with the code of its reason and the clause; another may have been asked for. */
  proposedStrategy: Strategy,
  strategyReason: z.string(),
  strategyClause: z.string(),
  seed: z.string(),
  groupSize: z.number(),
  targets: z.array(
    TargetFacts.extend({
      taskName: z.string().nullable(),
      /** Nominal minutes of the task, and what the shifts of the last months really had. */
      nominalMin: z.number().nullable(),
      observed: ObservedDuration.nullable(),
      reasons: PlanReasons,
    }),
  ),
  people: z.array(SurveyPerson.extend({ name: z.string(), employeeNumber: z.string() })),
  instruments: z.array(
    z.object({
      id: z.uuid(),
      name: z.string(),
      serialNumber: z.string(),
      kind: z.string(),
      class: z.string(),
      calibrationDueOn: IsoDate.nullable(),
      calibrationFailedOn: IsoDate.nullable(),
      reservedBy: z.array(
        z.object({
          surveyId: z.uuid(),
          surveyName: z.string(),
          fromDate: IsoDate,
          toDate: IsoDate,
        }),
      ),
    }),
  ),
});
export type SurveyPlan = z.infer<typeof SurveyPlan>;

/** One sample of a survey: a run by hand, a full-day run, or a stretch of a run's time history. */
export const SurveySample = z.object({
  runId: z.uuid(),
  runRevisionId: z.uuid(),
  fromS: z.number().nullable(),
  toS: z.number().nullable(),
  taskId: z.uuid().nullable(),
  workerId: z.uuid().nullable(),
  workerName: z.string().nullable(),
  place: z.string().nullable(),
  date: IsoDate,
  durationMin: z.number().nullable(),
  /** LAeq, dB; null where the run gives none, as a 5 dB average. */
  laeqDb: z.number().nullable(),
  lceqDb: z.number().nullable(),
  lasMaxDb: z.number().nullable(),
  peakDb: z.number().nullable(),
  peakWeighting: z.enum(["A", "C", "Z"]).nullable(),
  octaveBandsDb: OctaveBands.nullable(),
  instrument: InstrumentClassName,
  serialNumber: z.string(),
  checkBeforeDb: z.number().nullable(),
  checkAfterDb: z.number().nullable(),
  doubts: z.array(z.string()),
  keptReason: z.string().nullable(),
  unusual: z.string().nullable(),
  /** The target it counts for; null where it counts for none, and then why. */
  position: z.number().nullable(),
  notCounted: z.enum(["still-out", "refused", "no-laeq", "of-no-target"]).nullable(),
});
export type SurveySample = z.infer<typeof SurveySample>;

/** What the samples of one target come to. */
export const TargetResult = z.object({
  position: z.number(),
  taskId: z.uuid().nullable(),
  taskName: z.string().nullable(),
  samplesCount: z.number(),
  wantedCount: z.number(),
  levelDb: z.number().nullable(),
  /** Greatest less least. */
  rangeDb: z.number().nullable(),
  /** Standard uncertainty u1 of the samples of a job or of full days; null: of a task, or too few. */
  scatterDb: z.number().nullable(),
  /** Samples still to take. */
  missingCount: z.number(),
  /** Code of what the standard asks for next; null: enough. */
  asksFor: z.enum(["more-samples", "large-spread", "plan-anew"]).nullable(),
  lcMinusLaDb: z.number().nullable(),
  octaveBandsDb: OctaveBands.nullable(),
  lasMaxDb: z.number().nullable(),
  peakDb: z.number().nullable(),
  peakWeighting: z.enum(["A", "C", "Z"]).nullable(),
  /** The worst that was used. */
  instrument: InstrumentClassName.nullable(),
  keptReasons: z.array(z.string()),
});
export type TargetResult = z.infer<typeof TargetResult>;

export const SurveyView = SurveyFacts.extend({
  id: z.uuid(),
  siteId: z.uuid(),
  jobId: z.uuid(),
  jobName: z.string(),
  state: SurveyState,
  closingNote: z.string().nullable(),
  authorName: z.string().nullable(),
  createdAt: z.string(),
  revision: z.number(),
  can: Can("change", "adopt"),
});
export type SurveyView = z.infer<typeof SurveyView>;
export const SurveyDetail = SurveyView.extend({
  peopleNames: z.record(z.string(), z.object({ name: z.string(), employeeNumber: z.string() })),
  taskNames: z.record(z.string(), z.string()),
  instrumentNames: z.record(
    z.string(),
    z.object({
      name: z.string(),
      serialNumber: z.string(),
      calibrationDueOn: IsoDate.nullable(),
      calibrationFailedOn: IsoDate.nullable(),
    }),
  ),
  /** Tasks of the group's nominal day, for a result that stands for one of them. */
  nominalDay: z.array(
    z.object({ taskId: z.uuid(), taskName: z.string(), durationMin: z.number() }),
  ),
  samples: z.array(SurveySample),
  results: z.array(TargetResult),
  /** Levels that rest on this survey already. */
  adopted: z.array(
    z.object({
      taskId: z.uuid(),
      taskName: z.string(),
      levelDb: LevelDb,
      effectiveFrom: IsoDate,
      isInForce: z.boolean(),
    }),
  ),
});
export type SurveyDetail = z.infer<typeof SurveyDetail>;
export const SurveyRow = SurveyView.pick({
  id: true,
  siteId: true,
  jobId: true,
  jobName: true,
  name: true,
  strategy: true,
  state: true,
  fromDate: true,
  toDate: true,
}).extend({ samplesCount: z.number(), wantedCount: z.number() });
export const SurveyPage = pageOf(SurveyRow);
export const SurveyFilter = PageQuery.extend({
  siteId: z.uuid().optional(),
  jobId: z.uuid().optional(),
  state: SurveyState.optional(),
});

/** The survey's results become the levels of its tasks. */
export const SurveyAdoption = z.object({
  effectiveFrom: IsoDate,
  reason: Reason,
  /** A result without octave bands keeps those of the task's level in force, shifted to the new level. */
  keepsSpectrum: z.boolean().default(false),
  /** Which task a job-based or full-day result stands for; a task-based one names its own tasks. */
  targets: z
    .array(z.object({ position: z.number().int().min(0), taskId: z.uuid() }))
    .min(1)
    .max(24),
});
export type SurveyAdoption = z.infer<typeof SurveyAdoption>;

/** Why a group's noise wants measuring. Codes; the words are made where they are shown. */
export const MeasuringReason = z.discriminatedUnion("code", [
  z.object({
    code: z.literal("never-measured"),
    taskNames: z.array(z.string()),
    taskIds: z.array(z.uuid()),
  }),
  z.object({ code: z.literal("measured-too-long-ago"), measuredOn: IsoDate, dueOn: IsoDate }),
  z.object({
    code: z.literal("changed-since"),
    changeId: z.uuid(),
    kind: z.string(),
    what: z.string(),
    happenedOn: IsoDate,
    /** Tasks of the group whose levels are from before it. */
    taskIds: z.array(z.uuid()),
    /** Protectors chosen on what has changed. */
    assignmentsCount: z.number(),
  }),
  z.object({ code: z.literal("undecided"), daysCount: z.number(), workersCount: z.number() }),
  z.object({
    code: z.literal("doubtful-instrument"),
    serialNumber: z.string(),
    runsCount: z.number(),
  }),
]);
export type MeasuringReason = z.infer<typeof MeasuringReason>;
export const MeasuringNeed = z.object({
  siteId: z.uuid(),
  siteName: z.string(),
  jobId: z.uuid(),
  jobName: z.string(),
  workersCount: z.number(),
  reasons: z.array(MeasuringReason).min(1),
  /** A survey under way for this group. */
  surveyId: z.uuid().nullable(),
});
export type MeasuringNeed = z.infer<typeof MeasuringNeed>;
export const MeasuringNeeds = z.object({
  rows: z.array(MeasuringNeed),
  groupsCount: z.number(),
  protectors: ProtectorsToReview,
  sites: z.array(
    z.object({
      id: z.uuid(),
      name: z.string(),
      remeasureAfterMonths: z.number().nullable(),
      revision: z.number(),
      can: Can("changeRules"),
    }),
  ),
});
export type MeasuringNeeds = z.infer<typeof MeasuringNeeds>;
/** After how many months a level counts as measured too long ago; null: the site states none. */
export const RemeasureInput = z.object({
  remeasureAfterMonths: z.number().int().min(1).max(240).nullable(),
});
export type RemeasureInput = z.infer<typeof RemeasureInput>;
