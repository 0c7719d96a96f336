/**
 * The words the arithmetic speaks. Levels are dB (A-weighted unless a name says otherwise), durations minutes,
 * doses and shares percent. `null` means "not known" and is never read as zero.
 */

/** Octave-band mid frequencies of every spectrum and attenuation here, Hz. The 63 Hz band may be absent. */
export const OCTAVE_BANDS_HZ = [63, 125, 250, 500, 1000, 2000, 4000, 8000] as const;

/** One value per band of `OCTAVE_BANDS_HZ`; only the first (63 Hz) may be null. */
export type OctaveBandValues = readonly [
  number | null,
  number,
  number,
  number,
  number,
  number,
  number,
  number,
];

export type Weighting = "A" | "C" | "Z";

/** Settings under which a dose or an average was taken. `thresholdDb` null: no threshold. */
export interface MeterSettings {
  readonly criterionLevelDb: number;
  readonly exchangeRateDb: number;
  readonly thresholdDb: number | null;
  readonly weighting: Weighting;
  readonly response: "slow" | "fast" | "none";
}

/**
 * What a level is an average of: the energy mean (LAeq), an exchange-rate mean under its settings (LAVG), or a level
 * that hardly moves, read on slow, which serves every rule.
 */
export type LevelMetric =
  | { readonly kind: "laeq" }
  | { readonly kind: "lavg"; readonly settings: MeterSettings }
  | { readonly kind: "steady" };

export interface PeakLevel {
  readonly levelDb: number;
  readonly weighting: Weighting;
}

/** How well a level is known, best first. */
export type Grade = "measured-worker" | "measured-group" | "task-level" | "estimate";

export type InstrumentClass = "class-1-meter" | "class-2-meter" | "dosimeter";

/** How a level was measured: task by task, by samples over a job, or over whole days. */
export type SurveyStrategy = "task" | "job" | "full-day";

/** The noise of one task. */
export interface TaskLevel {
  /** The record this level comes from; shown in the working. */
  readonly revisionId: string | null;
  readonly metric: LevelMetric;
  readonly levelDb: number;
  /** LC − LA of the task's noise. */
  readonly lcMinusLaDb: number | null;
  /** Unweighted octave-band levels of the task's noise. */
  readonly octaveBandsDb: OctaveBandValues | null;
  readonly lasMaxDb: number | null;
  readonly peak: PeakLevel | null;
  /** Samples behind the level, for the sampling part of the uncertainty. Empty: not sampled. */
  readonly samplesDb: readonly number[];
  readonly instrument: InstrumentClass | null;
  readonly grade: Grade;
  /** Strategy of the survey behind the samples; absent: task by task. */
  readonly strategy?: SurveyStrategy;
  /** The officer's reasons for samples, or too few of them, that count all the same; absent: none. */
  readonly keptReasons?: readonly string[];
  /** EN 458's type of an impulse noise: 1 mostly low, 2 middle and high, 3 high frequencies. Absent: not said. */
  readonly impulseType?: 1 | 2 | 3 | null;
}

export type ProtectorKind =
  | "earmuff"
  | "helmet-earmuff"
  | "foam-plug"
  | "premoulded-plug"
  | "custom-plug"
  | "banded-plug"
  | "level-dependent"
  | "active-earmuff"
  | "active-plug"
  | "communication-headset";

/** Real-ear attenuation by octave band: mean and standard deviation over the test subjects, dB. */
export interface BandAttenuation {
  readonly meanDb: OctaveBandValues;
  readonly sdDb: OctaveBandValues;
}

/** Test frequencies of the US label, Hz. @source epa-40-cfr-211 211.206 */
export const US_LABEL_HZ = [125, 250, 500, 1000, 2000, 3150, 4000, 6300, 8000] as const;

/** Real-ear attenuation at `US_LABEL_HZ`: mean and standard deviation, dB. */
export interface UsLabelAttenuation {
  readonly meanDb: readonly number[];
  readonly sdDb: readonly number[];
}

/** A percentile rating pair off the label, dB: what most users (80 %) and what few (20 %) reach or pass. */
export interface PercentileRating {
  readonly mostDb: number;
  readonly fewDb: number;
}

/** The electronic part of an active protector, apart from its cup or plug. */
export interface ActivePart {
  /** Active attenuation by band from the device's test report, dB; negative where it adds noise. */
  readonly attenuationDb: OctaveBandValues | null;
  /** Canceller's delay (s) and gain (1 = perfect), where the report gives these instead of bands. */
  readonly delayS: number | null;
  readonly gain: number | null;
  readonly maximumDb: number | null;
  readonly bandwidthHz: number | null;
  /** Outside level (dB(A)) above which the active part saturates and gets no credit. */
  readonly saturatesAboveDb: number | null;
  readonly batteryMin: number | null;
}

export interface ProtectorData {
  readonly modelId: string;
  readonly revisionId: string | null;
  readonly name: string;
  readonly kind: ProtectorKind;
  /** US single-number rating of the label, dB. */
  readonly usRatingDb: number | null;
  readonly snrDb: number | null;
  readonly hDb: number | null;
  readonly mDb: number | null;
  readonly lDb: number | null;
  readonly slc80Db: number | null;
  readonly bands: BandAttenuation | null;
  readonly active: ActivePart | null;
  /** Absent or null: not stated. */
  readonly percentile?: PercentileRating | null;
  readonly usLabel?: UsLabelAttenuation | null;
  /** By test subject, each the mean of the subject's trials, for ratings by the standard's later edition. */
  readonly subjectsDb?: readonly OctaveBandValues[] | null;
}

/** One protector, or two worn together, as assigned for a use. */
export interface Protection {
  readonly assignmentId: string | null;
  readonly inner: ProtectorData;
  readonly outer: ProtectorData | null;
  /** Test data of the two worn together, where the maker gives them. */
  readonly combinationBands: BandAttenuation | null;
  /** The worker's own measured attenuation (PAR), dB, with the confidence it is stated at. */
  readonly ownFitDb: number | null;
  readonly activeCheckPassed: boolean;
  /** ISO date of the check that says so. Absent: no check, or a day that is not stored. */
  readonly activeCheckedOn?: string;
  /** A-weighted level of a radio or signal under the cup while it is worn, dB. Absent or null: none. */
  readonly audioDb?: number | null;
}

export type Zone = "none" | "single" | "double";

/** What rounds, or people themselves, say of a wearing time that the shift leaves blank. */
export interface WearingLooks {
  readonly source: "round" | "own-report";
  /** The latest of them, and how many there are. */
  readonly roundId: string;
  /** ISO date. */
  readonly lastOn: string;
  readonly roundCount: number;
  readonly wornCount: number;
  readonly seenCount: number;
}

/** Where a share worn comes from. */
export type WornFrom =
  | { readonly how: "stated" }
  | { readonly how: "looks"; readonly looks: readonly WearingLooks[] };

/** One task of a shift. */
export interface TimedTask {
  readonly id: string;
  readonly taskId: string;
  readonly name: string;
  readonly durationMin: number;
  readonly level: TaskLevel | null;
  readonly zone: Zone;
  readonly protection: Protection | null;
  /** Share of the task for which the protector is worn; null: not known. */
  readonly wornPct: number | null;
  /** True where the share is one figure for the whole shift and not the task's own. */
  readonly wornIsShiftWide: boolean;
  /** Absent where nobody knows, and in results of a time when it was not kept. */
  readonly wornFrom?: WornFrom;
  /** Standard uncertainty of the duration, minutes. Absent where the recorded minutes are the day itself. */
  readonly durationUncertaintyMin?: number;
}

export type Unaccounted =
  | { readonly how: "unknown" }
  | { readonly how: "like-the-rest" }
  | { readonly how: "quiet"; readonly levelDb: number };

/** Time within a run that its reading leaves out, minutes, and how it was. */
export type LeftOut = Unaccounted & { readonly minutes: number };

/** A dosimeter's statement about a shift, under its settings. */
export interface ReadingInput {
  readonly id: string;
  readonly runId: string;
  readonly settings: MeterSettings;
  /** Run time of the instrument, minutes, without what is left out. */
  readonly durationMin: number;
  /** Absent: nothing is left out. It is no silence: unknown, the reading proves what it holds and nothing more. */
  readonly leftOut?: LeftOut;
  readonly dosePct: number | null;
  /** LAVG under `settings`, or LAeq where the exchange rate is 3 and there is no threshold. */
  readonly averageDb: number | null;
  readonly lceqDb: number | null;
  readonly lasMaxDb: number | null;
  readonly peak: PeakLevel | null;
  /** `shift`: it covers the shift; `projected`: the officer says the rest was like it; `part`: only evidence. */
  readonly covers: "shift" | "projected" | "part";
  readonly instrument: InstrumentClass;
  /** Why it counts in spite of a failed field check; null when it passed. */
  readonly keptReason: string | null;
}

export interface ShiftInput {
  readonly id: string;
  readonly revisionId: string | null;
  /** Elapsed minutes. */
  readonly lengthMin: number;
  readonly tasks: readonly TimedTask[];
  readonly unaccounted: Unaccounted;
  readonly readings: readonly ReadingInput[];
}

/** All that a verdict on one worker's day rests on. */
export interface DayInput {
  readonly workerId: string;
  /** Local date on which the shifts start, ISO 8601. */
  readonly date: string;
  readonly shifts: readonly ShiftInput[];
  readonly site: {
    /** A protector counts as worn in tasks of this level or more, or in a zone. */
    readonly wearFromDb: number;
    /** Judge limits with the active part's credit (needs a passed check as well). */
    readonly creditsActivePart: boolean;
    /** ISO date from which these settings hold. Absent for a day that is not stored. */
    readonly settingsFrom?: string;
    /** Use the ISO 9612 uncertainty in verdicts. */
    readonly usesUncertainty: boolean;
  };
  /** A stricter at-ear target of this worker's own, dB. */
  readonly personalTargetDb: number | null;
  /** This worker must wear a protector whatever the level. */
  readonly mustWear: boolean;
}

export type Verdict = "under" | "over" | "cant-tell-yet" | "not-assessed";
export type ProtectorWord =
  | "too-little"
  | "just-enough"
  | "good"
  | "strong-side"
  | "too-much"
  | "enough";
export type AttenuationMethod =
  | "octave-band"
  | "hml"
  | "snr"
  | "us-single-number"
  | "percentile"
  | "slc80"
  | "own-fit";

/** What stands between a criterion and a plain verdict; a code, put into words by the screen. */
export type Reason =
  | "no-tasks"
  | "level-missing"
  | "time-unknown"
  | "only-upper-bound"
  | "only-lower-bound"
  | "within-uncertainty"
  | "below-threshold"
  | "no-peak"
  | "peak-weighting"
  | "no-slow-maximum"
  | "wearing-unknown"
  | "no-attenuation-data"
  | "combination-not-tested"
  | "no-c-weighted-level"
  | "lc-la-out-of-range"
  | "no-spectrum"
  | "saturated"
  | "not-stated"
  | "peak-at-ear-not-assessed"
  | "worn-in-part"
  | "imported";

/** Why no uncertainty can be stated. */
export type UncertaintyReason =
  | "no-tasks"
  | "level-missing"
  | "time-unknown"
  | "not-an-energy-level"
  | "too-few-samples"
  | "no-instrument";

export interface Criterion {
  /** Stable within its rule set, kebab-case. */
  readonly id: string;
  readonly kind: "limit" | "action" | "ceiling" | "peak" | "dual-protection";
  /** Short name in English, a key of the catalogue. */
  readonly label: string;
  readonly quantity: "lex-8h" | "lex-weekly" | "dose" | "table-dose" | "slow-maximum" | "peak";
  /** dB, or percent where the quantity is a dose. */
  readonly value: number;
  /** The same limit as an 8-hour level, dB, where a dose stands for one. */
  readonly levelDb: number | null;
  readonly comparator: "exceeds" | "reaches";
  readonly judged: "without-protection" | "at-the-ear";
  readonly exchangeRateDb: number | null;
  readonly thresholdDb: number | null;
  readonly criterionLevelDb: number | null;
  readonly referenceMin: number;
  /** k of TWA = Lc + k·lg(D/100) as the rule prints it. */
  readonly twaFactor: number | null;
  readonly peakWeighting: Weighting | null;
  /** Levels and allowed minutes, ascending, where the rule's table is the rule. */
  readonly table: readonly (readonly [levelDb: number, allowedMin: number])[] | null;
  readonly usesUncertainty: boolean;
  /** "should" in the text where it is not a limit. */
  readonly force: "must" | "should";
  /** What the employer has to do, in our own words. */
  readonly duties: readonly string[];
  readonly citation: string;
  readonly sourceStatus: "read" | "from-memory";
}

export interface RuleSetVersion {
  readonly key: string;
  readonly version: number;
  readonly title: string;
  readonly jurisdiction: string;
  readonly citation: string;
  readonly effectiveFrom: string;
  readonly effectiveTo: string | null;
  readonly sourceNote: string;
  readonly criteria: readonly Criterion[];
  readonly protection: {
    /** Governing methods in order: the first that the data allow is the one that counts. Empty: not stated. */
    readonly methods: readonly AttenuationMethod[];
    /** Share protected by the octave-band method as α times the standard deviation. */
    readonly alpha: number;
    readonly derating: "none" | "half" | "by-type";
    /** Flat national allowance, dB; never on an own fit. */
    readonly allowanceDb: number;
    readonly ownFit: "replaces" | "only-lowers";
    readonly double: "better-plus-5" | "test-data-only";
    readonly adequacy: "en-458" | "appendix-b" | "not-stated";
    /** EN 458: the action value the band hangs from. Appendix B: the target at the ear. */
    readonly targetDb: number | null;
    /** Appendix B: the target for a worker with a stricter requirement. */
    readonly strictTargetDb: number | null;
  };
  /** What the rule does not state, in words, so that a screen can say so. */
  readonly notStated: readonly string[];
}

export interface CriterionResult {
  readonly ruleSetKey: string;
  readonly ruleSetVersion: number;
  readonly criterionId: string;
  readonly judged: Criterion["judged"];
  /** The level compared: 8-hour level, TWA, maximum or peak, dB. Null: none (then `reason` says why). */
  readonly levelDb: number | null;
  readonly dosePct: number | null;
  /** Whether the number is exact or only an upper or a lower bound of the true one. */
  readonly bound: "exact" | "upper" | "lower";
  readonly basis: "reading" | "projected-reading" | "tasks";
  readonly uncertaintyDb: number | null;
  readonly verdict: Verdict;
  /** The comparator also holds at L − U. */
  readonly isClear: boolean;
  readonly reason: Reason | null;
}

export interface MethodResult {
  readonly method: AttenuationMethod;
  /** What is left of the noise at the ear while worn, active part off and without programme audio, dB(A). */
  readonly atEarDb: number | null;
  readonly wasClamped: boolean;
  readonly reason: Reason | null;
}

/** A task seen from under the protector. */
export interface TaskAtEar {
  readonly timedTaskId: string;
  readonly outsideDb: number | null;
  /** The protector counts as worn in this task. */
  readonly isWorn: boolean;
  readonly wornPct: number | null;
  readonly methods: readonly MethodResult[];
  readonly governingMethod: AttenuationMethod | null;
  /** While worn, active part off and on. */
  readonly wornDb: number | null;
  readonly wornActiveDb: number | null;
  /**
   * Between which levels the one while worn lies, active part off, where the task's level only bounds the rule's own;
   * null on a side that is open. Absent: `wornDb` is it.
   */
  readonly wornRangeDb?: { readonly leastDb: number | null; readonly mostDb: number | null };
  /** Wearing time counted. */
  readonly inTaskDb: number | null;
  readonly inTaskActiveDb: number | null;
  readonly word: ProtectorWord | null;
  readonly wordActive: ProtectorWord | null;
  readonly reason: Reason | null;
  /**
   * Programme audio that is in the levels while worn, dB(A), and what the protector leaves of the noise alone, active
   * part off and on. Absent without one.
   */
  readonly audio?: {
    readonly levelDb: number;
    readonly noiseDb: number;
    readonly noiseActiveDb: number | null;
  };
}

export interface DayEvaluation {
  readonly methodVersion: number;
  readonly date: string;
  readonly shiftMin: number;
  readonly accountedMin: number;
  readonly unaccountedMin: number;
  readonly grade: Grade;
  readonly isProjected: boolean;
  /** Some reading or level no longer bears the standard's name, with the officer's reasons. */
  readonly keptReasons: readonly string[];
  /**
   * The governing rule's main figure without protection (8-hour level or TWA) and at the ear. For a rule with a
   * threshold the level is that of the criterion the strip shows: the action value's.
   */
  readonly outsideDb: number | null;
  readonly outsideBound: "exact" | "upper" | "lower";
  readonly atEarDb: number | null;
  /** On which side of the true one the level at the ear stands, where it is not exact. */
  readonly atEarBound: "exact" | "upper" | "lower";
  /** Whole day at the ear with the active part on; null without one. */
  readonly atEarActiveDb: number | null;
  /** The day as worked: active part on while the battery lasts. */
  readonly atEarAsWorkedDb: number | null;
  /**
   * Where the site credits an active part that passed its check: the day at the ear as it is judged, and the level while
   * worn in the deciding task, dB. Absent: the part off counts, as in `atEarDb`.
   */
  readonly counted?: { readonly atEarDb: number | null; readonly whileWornDb: number | null };
  /** Expanded uncertainty of the energy level (LEX), dB; belongs to no dose. */
  readonly uncertaintyDb: number | null;
  readonly uncertaintyReason: UncertaintyReason | null;
  readonly criteria: readonly CriterionResult[];
  readonly tasks: readonly TaskAtEar[];
  /** The day's word for its protector and the task that decides it. */
  readonly word: ProtectorWord | null;
  readonly decidingTaskId: string | null;
  readonly protectorReason: Reason | null;
  /** Shares of the tasks in the outside level under the governing exchange rate, percent, by timed task id. */
  readonly sharesPct: Readonly<Record<string, number>>;
  /** Level by tasks beside a governing reading, and reading − tasks, dB. */
  readonly tasksDb: number | null;
  readonly readingGapDb: number | null;
  /** Criteria of the governing rule set that no reading or level could serve exactly. */
  readonly missingReadings: readonly string[];
}
