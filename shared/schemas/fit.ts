import { z } from "zod";
import { Can, IsoDate, PageQuery, pageOf, Reason } from "./common";
import { OctaveBands } from "./evaluation";

export const FIT_METHODS = ["psychophysical", "real-ear-microphones", "two-microphones"] as const;
export const FitMethod = z.enum(FIT_METHODS);
export type FitMethod = z.infer<typeof FitMethod>;

export const CONFIDENCE_PCT = [50, 84, 90, 95, 98] as const;
export const ConfidencePct = z.union(CONFIDENCE_PCT.map((pct) => z.literal(pct)));
export const Size = z.string().trim().min(1).max(20);
export const Ear = z.enum(["left", "right"]);
export type Ear = z.infer<typeof Ear>;
const TrialDb = z.number().min(-20).max(80);

/** What was done and found, by ear: each trial is one donning, its attenuation as a single figure, dB. */
export const FitFacts = z.object({
  leftDb: z.array(TrialDb).max(10),
  rightDb: z.array(TrialDb).max(10),
  /** The method's own standard uncertainty, dB. */
  methodSdDb: z.number().min(0).max(20),
  /** Of a two-microphone check, by ear. */
  bands: z
    .object({
      left: z.lazy(() => EarBands).nullable(),
      right: z.lazy(() => EarBands).nullable(),
    })
    .nullable()
    .default(null),
});
export type FitFacts = z.infer<typeof FitFacts>;

/** What two microphones found at one ear. Null: too little noise or coherence in the band. */
const BandOrNull = z.array(z.number().nullable()).length(8);
export const EarBands = z.object({
  /** Outside less inside, active part off, dB. */
  noiseReductionDb: BandOrNull,
  /** Noise reduction with the correction to the open ear added, dB. */
  attenuationDb: BandOrNull,
  /** With the active part on less with it off, dB; null: no such pair. */
  activeDb: BandOrNull.nullable(),
  /** The microphones were not calibrated: of these only `activeDb`, a difference of two, is more than relative. */
  isRelative: z.boolean().default(false),
});
export type EarBands = z.infer<typeof EarBands>;

/** At least one trial at one ear. */
function someTrial(context: { value: { facts: FitFacts }; issues: unknown[] }): void {
  const { leftDb, rightDb } = context.value.facts;
  if (leftDb.length + rightDb.length === 0)
    context.issues.push({
      code: "custom",
      input: context.value.facts,
      path: ["facts", "leftDb"],
      params: { code: "no-trial" },
    });
}

const FitEntry = z.object({
  testedOn: IsoDate,
  method: FitMethod,
  size: Size.nullable().default(null),
  facts: FitFacts,
  confidencePct: ConfidencePct,
  /** What the worker's noise asks for, dB; null: not known, and nothing to pass. */
  needDb: z.number().min(0).max(80).nullable(),
  note: z.string().trim().max(10_000).default(""),
});
export const FitTestInput = FitEntry.extend({ modelId: z.uuid() }).check((context) =>
  someTrial(context as unknown as Parameters<typeof someTrial>[0]),
);
export type FitTestInput = z.infer<typeof FitTestInput>;
export const FitTestChange = FitEntry.omit({ testedOn: true })
  .extend({ reason: Reason })
  .check((context) => someTrial(context as unknown as Parameters<typeof someTrial>[0]));
export type FitTestChange = z.infer<typeof FitTestChange>;
export const FitTestVoid = z.object({ reason: Reason });

export const FitTestView = z.object({
  id: z.uuid(),
  revision: z.number(),
  siteId: z.uuid(),
  workerId: z.uuid(),
  workerName: z.string(),
  employeeNumber: z.string(),
  modelId: z.uuid(),
  modelName: z.string(),
  ...FitEntry.shape,
  leftDb: z.number().nullable(),
  rightDb: z.number().nullable(),
  parDb: z.number().nullable(),
  hasPassed: z.boolean().nullable(),
  activePassed: z.boolean().nullable(),
  /** Where Appendix B governs today, the label’s US number less 7, dB: it stands beside the PAR. */
  labelLess7Db: z.number().nullable(),
  /** Whether the device was issued on it, or is out with this worker in that size; else it was only tried. */
  outcome: z.enum(["issued", "tried"]),
  dueOn: IsoDate.nullable(),
  isVoid: z.boolean(),
  /** Why it was struck out; null: it stands. */
  struckReason: z.string().nullable(),
  /** Who entered the revision in force; of a test that was struck out, who did that. */
  authorName: z.string().nullable(),
  can: Can("change"),
});
export type FitTestView = z.infer<typeof FitTestView>;
export const FitTestFilter = PageQuery.extend({
  siteId: z.uuid().optional(),
  workerId: z.uuid().optional(),
  modelId: z.uuid().optional(),
});
export const FitTestPage = pageOf(FitTestView);

/** What a worker's noise asks of a protector, from the worker's own days. */
export const AttenuationNeed = z.object({
  /** Null: no noise on record. */
  needDb: z.number().nullable(),
  outsideDb: z.number().nullable(),
  /** The noise is known as a bound only: this is the most that it can be. */
  isUpperBound: z.boolean(),
  targetDb: z.number().nullable(),
  /** The task that asks; null: the shift as a whole does. */
  taskId: z.uuid().nullable(),
  taskName: z.string().nullable(),
  /** An own fit, rated in pink noise, says too much of it: it can only lower what the label gives there. */
  isTooDeepForOwnFit: z.boolean(),
  /** The most that may come off before it is too much; null: the rule has no such scale. */
  mostDb: z.number().nullable(),
  reason: z.string().nullable(),
});
export type AttenuationNeed = z.infer<typeof AttenuationNeed>;

export const Gear = z.enum(["helmet", "glasses", "respirator"]);
export type Gear = z.infer<typeof Gear>;
/** What is worn beside a protector, by a worker always or in a task. */
export const GearSet = z.array(Gear).max(3).default([]);

/** A model offered to a worker, with why it stands where it stands. */
export const Candidate = z.object({
  modelId: z.uuid(),
  outerModelId: z.uuid().nullable(),
  name: z.string(),
  kind: z.string(),
  /** Set: it is out, and why. */
  excludedBy: z
    .object({ code: z.enum(["gear", "cannot-wear", "no-data", "archived"]), gear: Gear.nullable() })
    .nullable(),
  word: z
    .enum(["too-little", "just-enough", "good", "strong-side", "too-much", "enough"])
    .nullable(),
  /** While worn in the noise that decides; under a rule that judges the shift in the loudest. */
  wornDb: z.number().nullable(),
  /** The same with its active part on; null: it has none, or nothing is known of it there. */
  wornActiveDb: z.number().nullable(),
  /** Word and margin are of the active part on: credited at the site, and checked on who wears it. */
  isActiveCredited: z.boolean(),
  wornIn: z.string().nullable(),
  /** The shift's TWA with it on, where the rule judges the shift. */
  twaDb: z.number().nullable(),
  /** These are the most that they can be: an average that left something out bounds them. */
  isWornMost: z.boolean(),
  isTwaMost: z.boolean(),
  /** EN 458's word beside the rule's, where that has no scale for too much. */
  scaleWord: z
    .enum(["too-little", "just-enough", "good", "strong-side", "too-much", "enough"])
    .nullable(),
  /** The task that EN 458's word is about. */
  scaleIn: z.string().nullable(),
  /** By how far the level at the ear stays under the target at the confidence compared, dB. */
  marginDb: z.number().nullable(),
  /** Users protected by that much, percent; null: the share that the rule's own method protects. */
  marginSharePct: z.number().nullable(),
  lastFit: z
    .object({
      parDb: z.number(),
      hasPassed: z.boolean().nullable(),
      needDb: z.number().nullable(),
      testedOn: IsoDate,
    })
    .nullable(),
  batteryMin: z.number().nullable(),
  batteryLasts: z.boolean().nullable(),
  stock: z.number().nullable(),
  /** Where Appendix B governs, the label’s US number less 7 with no derating, dB; it stands beside an own fit. */
  labelLess7Db: z.number().nullable(),
  /** The comparison that put it behind the one before. */
  decidedBy: z.enum([
    "first",
    "compatibility",
    "adequacy",
    "underprotection",
    "overprotection",
    "margin",
    "least-margin",
    "fit",
    "battery",
    "stock",
    "name",
  ]),
});
export type Candidate = z.infer<typeof Candidate>;

/** A worker at the fitting desk. */
export const FittingDesk = z.object({
  worker: z.object({
    id: z.uuid(),
    siteId: z.uuid(),
    siteName: z.string(),
    name: z.string(),
    employeeNumber: z.string(),
    jobName: z.string().nullable(),
    wornGear: z.array(Gear),
    personalTargetDb: z.number().nullable(),
  }),
  ruleSetKey: z.string(),
  ruleSetVersion: z.number(),
  need: AttenuationNeed,
  policy: z.object({
    confidencePct: ConfidencePct,
    everyMonths: z.number().nullable(),
    afterFailDays: z.number().nullable(),
  }),
  /** The site credits an active part that was checked on its wearer. */
  creditsActivePart: z.boolean(),
  candidates: z.array(Candidate),
  /** Two together, where every single one leaves too little. */
  pairs: z.array(Candidate),
  tests: z.array(FitTestView),
  issued: z.array(
    z.object({
      id: z.uuid(),
      revision: z.number(),
      modelId: z.uuid(),
      modelName: z.string(),
      size: z.string().nullable(),
      issuedOn: IsoDate,
      isAcknowledged: z.boolean(),
    }),
  ),
  /** What is assigned to this worker today or later: an issue takes the place of one of the same use. */
  assigned: z.array(
    z.object({
      taskId: z.uuid().nullable(),
      areaId: z.uuid().nullable(),
      innerModelId: z.uuid(),
      outerModelId: z.uuid().nullable(),
      size: z.string().nullable(),
      name: z.string(),
      fromDate: IsoDate,
      toDate: IsoDate.nullable(),
    }),
  ),
  can: Can("test", "issue"),
});
export type FittingDesk = z.infer<typeof FittingDesk>;

/** Why a reason is asked for before a device goes out; null: none is. */
export function reasonAskedFor(
  kindsOffered: readonly string[],
  stock: number | null,
  /** The fit on which it goes out; null: none was tested. */
  fit: Pick<FitTestView, "hasPassed" | "needDb"> | null,
): "fit-not-passed" | "fit-not-assessed" | "one-kind-offered" | "none-in-stock" | null {
  if (fit?.hasPassed === false) return "fit-not-passed";
  // One ear alone reaches the need: nobody knows of the other.
  if (fit?.hasPassed === null && fit.needDb !== null && fit.needDb > 0) return "fit-not-assessed";
  if (new Set(kindsOffered).size < 2) return "one-kind-offered";
  return stock !== null && stock < 1 ? "none-in-stock" : null;
}

/** Hands a device out: the assignment, the stock and the acknowledgement in one. */
export const IssueInput = z.object({
  modelId: z.uuid(),
  size: Size.nullable().default(null),
  fitTestId: z.uuid().nullable().default(null),
  taskId: z.uuid().nullable().default(null),
  areaId: z.uuid().nullable().default(null),
  issuedOn: IsoDate,
  offeredModelIds: z.array(z.uuid()).min(1).max(40),
  wasInstructed: z.boolean(),
  isAcknowledged: z.boolean(),
  /** The fit not passed or not assessed, only one kind on offer, or none in stock: why all the same. */
  reason: Reason.nullable().default(null),
});
export type IssueInput = z.infer<typeof IssueInput>;
export const IssueEnd = z.object({
  endedOn: IsoDate,
  how: z.enum(["returned", "lost", "damaged", "replaced"]),
});
export const IssueView = z.object({
  id: z.uuid(),
  revision: z.number(),
  siteId: z.uuid(),
  workerId: z.uuid(),
  workerName: z.string(),
  employeeNumber: z.string(),
  modelId: z.uuid(),
  modelName: z.string(),
  size: z.string().nullable(),
  useName: z.string().nullable(),
  issuedOn: IsoDate,
  offered: z.array(z.string()),
  wasInstructed: z.boolean(),
  /** Why only one kind was on offer, or it went out with none in stock; null unless the reader is an officer. */
  reason: z.string().nullable(),
  acknowledgedHow: z.enum(["in-person", "own-page"]).nullable(),
  endedOn: IsoDate.nullable(),
  endedHow: IssueEnd.shape.how.nullable(),
  parDb: z.number().nullable(),
  authorName: z.string().nullable(),
  can: Can("end", "acknowledge"),
});
export type IssueView = z.infer<typeof IssueView>;
/** What is answered to whoever hands one out. */
export const IssueSaved = IssueView.extend({
  /** What was assigned for the same use before, and ends with it; null: nothing, or the same device goes on. */
  replacedName: z.string().nullable(),
});
export type IssueSaved = z.infer<typeof IssueSaved>;
export const IssuePage = pageOf(IssueView);
export const IssueFilter = PageQuery.extend({
  siteId: z.uuid().optional(),
  workerId: z.uuid().optional(),
  /** `open`: those that are still out. */
  state: z.enum(["open", "all"]).default("all"),
});

export const RefusalInput = z.object({
  modelId: z.uuid().nullable().default(null),
  kind: z.enum(["refused", "not-worn", "cannot-wear"]),
  happenedOn: IsoDate,
  reason: Reason,
});
export type RefusalInput = z.infer<typeof RefusalInput>;
export const RefusalView = RefusalInput.extend({
  id: z.uuid(),
  workerId: z.uuid(),
  modelName: z.string().nullable(),
  authorName: z.string().nullable(),
});
export type RefusalView = z.infer<typeof RefusalView>;

export const RefusalList = z.object({ rows: z.array(RefusalView) });
export type RefusalList = z.infer<typeof RefusalList>;
/** What is answered to whoever enters one: its reason stands in its own table and nowhere else. */
export const RefusalSaved = z.object({ id: z.uuid() });

/** Who stands at the desk: by employee number, or by name where no number is meant. */
export const FittingLookup = z.object({ employeeNumber: z.string().trim().min(1).max(100) });
export const FittingFound = z.object({
  rows: z.array(
    z.object({
      id: z.uuid(),
      name: z.string(),
      employeeNumber: z.string(),
      siteName: z.string(),
      /** The number is the one that was asked for. */
      isExact: z.boolean(),
    }),
  ),
});
export type FittingFound = z.infer<typeof FittingFound>;

/** A group's own fits of one model beside its label. */
export const FitDistribution = z.object({
  rows: z.array(
    z.object({
      modelId: z.uuid(),
      modelName: z.string(),
      count: z.number(),
      failedCount: z.number(),
      parsDb: z.array(z.number()),
      meanDb: z.number(),
      sdDb: z.number().nullable(),
      /** What the label promises in the same terms, dB; null: nothing comparable. */
      labelDb: z.number().nullable(),
      labelMethod: z.string().nullable(),
    }),
  ),
});

/** A site's rules of fitting. */
export const FitPolicyInput = z.object({
  confidencePct: ConfidencePct,
  everyMonths: z.number().int().min(1).max(120).nullable(),
  afterFailDays: z.number().int().min(1).max(365).nullable(),
  /** Within which a device never tested on its wearer has its test. Common practice, no source. */
  firstDays: z.number().int().min(1).max(365).default(90),
});
export type FitPolicyInput = z.infer<typeof FitPolicyInput>;

/** What a policy would make due at a site. */
export const FitPolicyPreview = z.object({
  dueNowCount: z.number(),
  /** Wearers of a device that was never tested on them, whose test would be due later. */
  untestedCount: z.number(),
  untestedFrom: IsoDate.nullable(),
  untestedTo: IsoDate.nullable(),
});
export type FitPolicyPreview = z.infer<typeof FitPolicyPreview>;

/** Octave bands of both microphones, typed in place of a recording. */
export const TypedMicrophones = z.object({
  outsideOffDb: OctaveBands,
  insideOffDb: OctaveBands,
  outsideOnDb: OctaveBands.nullable().default(null),
  insideOnDb: OctaveBands.nullable().default(null),
});
