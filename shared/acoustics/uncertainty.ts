import { energyMeanDb } from "./exposure";
import { arithmeticMean } from "./mean";
import type { InstrumentClass, SurveyStrategy, UncertaintyReason } from "./types";

/** Coverage factor of the one-sided interval of 95 %. @source iso-9612-2009 C.1 */
export const COVERAGE_FACTOR = 1.65;

/** Standard uncertainty of the microphone's position, dB. @source iso-9612-2009 C.6 */
export const POSITION_DB = 1.0;

/** Standard uncertainty by instrument, dB. @source iso-9612-2009 Table C.5 */
export const INSTRUMENT_DB: Readonly<Record<InstrumentClass, number>> = {
  "class-1-meter": 0.7,
  "class-2-meter": 1.5,
  dosimeter: 1.5,
};

/**
 * Standard uncertainty of a task's level from its samples, dB: √(Σ(Li − L̄)² / (I(I − 1))), with the arithmetic mean
 * inside. Null below two samples: one sample says nothing about its own scatter, which is not the same as none.
 *
 * @source iso-9612-2009 C.2.2 (C.6)
 */
export function samplingUncertaintyDb(samplesDb: readonly number[]): number | null {
  const count = samplesDb.length;
  if (count < 2) return null;
  const meanDb = arithmeticMean(samplesDb);
  let squares = 0;
  for (const sampleDb of samplesDb) squares += (sampleDb - meanDb) ** 2;
  return Math.sqrt(squares / (count * (count - 1)));
}

/**
 * Level of a task from its samples, dB: their mean by energy.
 *
 * @throws RangeError without a sample.
 * @source iso-9612-2009 9.3 (7)
 */
export function taskLevelDb(samplesDb: readonly number[]): number {
  return energyMeanDb(samplesDb);
}

/** One task's (or one governing reading's) part in the budget of a daily level. */
export interface BudgetPart {
  /** Null for a governing reading. */
  readonly taskId: string | null;
  /** Share in the day's energy, 0 to 1: the sensitivity coefficient c1a. */
  readonly energyShare: number;
  readonly durationMin: number;
  /** u1a; null: none to state, as for a reading of one day, which carries instrument and position only. */
  readonly samplingDb: number | null;
  /** u1b, minutes. */
  readonly durationUncertaintyMin: number;
  readonly instrumentDb: number;
}

export interface UncertaintyBudget {
  readonly combinedDb: number;
  readonly expandedDb: number;
  /** Contributions to u², dB². */
  readonly samplingDb2: number;
  readonly durationDb2: number;
  readonly instrumentDb2: number;
  readonly positionDb2: number;
}

/**
 * Combined and expanded uncertainty of LEX,8h by tasks, dB: u² = Σ [c1a²(u1a² + u2² + u3²) + (c1b·u1b)²] with
 * c1a = Tm/T0 · 10^((Lm − LEX)/10) and c1b = 4.34·c1a/Tm; U = 1.65·u.
 *
 * @throws RangeError when there is no part.
 * @source iso-9612-2009 C.2.1 (C.3) to (C.5)
 */
export function uncertaintyBudget(parts: readonly BudgetPart[]): UncertaintyBudget {
  if (parts.length === 0) throw new RangeError("An uncertainty needs at least one part");
  let samplingDb2 = 0;
  let durationDb2 = 0;
  let instrumentDb2 = 0;
  let positionDb2 = 0;
  for (const part of parts) {
    const square = part.energyShare * part.energyShare;
    samplingDb2 += square * (part.samplingDb ?? 0) ** 2;
    instrumentDb2 += square * part.instrumentDb ** 2;
    positionDb2 += square * POSITION_DB ** 2;
    if (part.durationUncertaintyMin > 0) {
      const perMinute = durationSensitivityDbPerMin(part.energyShare, part.durationMin);
      durationDb2 += (perMinute * part.durationUncertaintyMin) ** 2;
    }
  }
  const combinedDb = Math.sqrt(samplingDb2 + durationDb2 + instrumentDb2 + positionDb2);
  return {
    combinedDb,
    expandedDb: COVERAGE_FACTOR * combinedDb,
    samplingDb2,
    durationDb2,
    instrumentDb2,
    positionDb2,
  };
}

/** c1b, dB per minute. @source iso-9612-2009 C.2.1 (C.5) */
export function durationSensitivityDbPerMin(energyShare: number, durationMin: number): number {
  return ((10 / Math.LN10) * energyShare) / durationMin;
}

/** What became of a day's uncertainty: a budget, or the reason why there is none. */
export type DayUncertainty =
  | {
      readonly budget: UncertaintyBudget;
      readonly parts: readonly BudgetPart[];
      readonly reason: null;
    }
  | { readonly budget: null; readonly parts: readonly []; readonly reason: UncertaintyReason };

/**
 * Least total measuring time of a job-based plan for a homogeneous group, hours.
 *
 * @throws RangeError for an empty group.
 * @source iso-9612-2009 10.2 Table 1
 */
export function minimumGroupMeasuringH(groupSize: number): number {
  if (!(groupSize >= 1)) throw new RangeError("A group has at least one worker");
  if (groupSize <= 5) return 5;
  if (groupSize <= 15) return 5 + (groupSize - 5) * 0.5;
  if (groupSize <= 40) return 10 + (groupSize - 15) * 0.25;
  return 17;
}

/**
 * Standard uncertainty of job-based or full-day samples, dB: √(Σ(Li − L̄)² / (N − 1)), not divided by √N.
 *
 * @throws RangeError below two samples.
 * @source iso-9612-2009 C.3.2 (C.12)
 */
export function jobSamplingUncertaintyDb(samplesDb: readonly number[]): number {
  const count = samplesDb.length;
  if (count < 2) throw new RangeError("A scatter needs at least two samples");
  const meanDb = arithmeticMean(samplesDb);
  let squares = 0;
  for (const sampleDb of samplesDb) squares += (sampleDb - meanDb) ** 2;
  return Math.sqrt(squares / (count - 1));
}

/** Fewest samples of a job, or of full days, for which the standard states a contribution. */
export const LEAST_JOB_SAMPLES = 3;

/** Scatter u1 above which the standard asks to plan anew rather than to state so wide a result, dB. */
export const LARGE_SCATTER_DB = 3.5;

/**
 * Contribution c1·u1 of N job-based or full-day samples with scatter u1, dB: the one-sided 95 % confidence limit of a
 * log-normal mean (Land), above the estimate by energy, over 1.65. The standard prints it as a table; this computes it.
 *
 * @throws RangeError below three samples, where it is not defined.
 * @source iso-9612-2009 C.3.2 Table C.4
 * @source land-1971
 */
export function jobSamplingContributionDb(sampleCount: number, scatterDb: number): number {
  if (!(sampleCount >= LEAST_JOB_SAMPLES))
    throw new RangeError("The contribution is defined from three samples on");
  if (scatterDb === 0) return 0;
  const sd = (scatterDb * Math.LN10) / 10;
  // By how much the mean of the logarithms lies below the limit of μ + σ²/2.
  const squares = (sampleCount - 1) * sd * sd;
  let low = 0;
  let high = 1;
  while (landTailShare(sampleCount, high, squares) > 0.05) high *= 2;
  for (let step = 0; step < 45; step++) {
    const middle = (low + high) / 2;
    if (landTailShare(sampleCount, middle, squares) > 0.05) low = middle;
    else high = middle;
  }
  const limitAboveMean = (low + high) / 2;
  return ((10 / Math.LN10) * (limitAboveMean - (sd * sd) / 2)) / COVERAGE_FACTOR;
}

/**
 * Probability, given the sum of squares about the hypothesis μ = −σ²/2, that a sample mean lies `depth` or more below
 * it. On the sphere of that sum of squares the mean's direction t has the density (1 − t²)^((n−3)/2)·e^(−κt), κ = √(nW)/2;
 * integrated over the angle, so that the ends stay smooth.
 */
function landTailShare(count: number, depth: number, squares: number): number {
  const total = squares + count * depth * depth;
  const kappa = Math.sqrt(count * total) / 2;
  const observed = Math.asin(-(Math.sqrt(count) * depth) / Math.sqrt(total));
  // The exponent is taken relative to its greatest value, against overflow.
  const density = (angle: number) =>
    Math.cos(angle) ** (count - 2) * Math.exp(-kappa * (Math.sin(angle) + 1));
  const tail = simpson(density, -Math.PI / 2, observed);
  return tail / (tail + simpson(density, observed, Math.PI / 2));
}

function simpson(f: (x: number) => number, from: number, to: number): number {
  const steps = 400;
  const width = (to - from) / steps;
  let sum = f(from) + f(to);
  for (let i = 1; i < steps; i++) sum += f(from + i * width) * (i % 2 === 1 ? 4 : 2);
  return (sum * width) / 3;
}

/**
 * Standard uncertainty of a task's duration from observed ones, minutes: √(Σ(Tj − T̄)² / (J(J − 1))). Null below two.
 *
 * @source iso-9612-2009 C.2.3 (C.7)
 */
export function observedDurationUncertaintyMin(durationsMin: readonly number[]): number | null {
  return samplingUncertaintyDb(durationsMin);
}

/**
 * Standard uncertainty of a task's duration where only its range is known, minutes: half of it.
 *
 * @throws RangeError when the longest is the shorter.
 * @source iso-9612-2009 C.2.3
 */
export function durationRangeUncertaintyMin(shortestMin: number, longestMin: number): number {
  if (!(longestMin >= shortestMin)) throw new RangeError("A range goes from shortest to longest");
  return 0.5 * (longestMin - shortestMin);
}

/** A task of a group's nominal day as a survey measured it. */
export interface SurveyedTask {
  readonly taskId: string;
  readonly samplesDb: readonly number[];
  readonly durationMin: number;
  readonly durationUncertaintyMin: number;
  readonly instrument: InstrumentClass;
}

/** What a survey of a group found: its tasks, or its samples of the job or of full days. */
export type GroupSurvey =
  | { readonly strategy: "task"; readonly tasks: readonly SurveyedTask[] }
  | {
      readonly strategy: "job" | "full-day";
      readonly samplesDb: readonly number[];
      /** Effective duration Te of the working day, minutes. */
      readonly effectiveMin: number;
      readonly instrument: InstrumentClass;
    };

export type BudgetSource = "sampling" | "duration" | "instrument" | "position";

/** One line of a group's budget. */
export interface BudgetItem {
  readonly source: BudgetSource;
  /** Null: of all tasks together, or of a job or full days. */
  readonly taskId: string | null;
  /** Contribution to the combined uncertainty, c·u, dB. */
  readonly contributionDb: number;
  /** Share in u², percent. */
  readonly sharePct: number;
}

export interface GroupBudget {
  readonly strategy: SurveyStrategy;
  readonly lexDb: number;
  readonly combinedDb: number;
  readonly expandedDb: number;
  /** By falling contribution; the first dominates. */
  readonly items: readonly BudgetItem[];
  readonly dominant: BudgetItem;
  /** u1 of a job or of full days, dB; null by tasks. */
  readonly scatterDb: number | null;
  /** The scatter is so large that the standard asks to plan anew. */
  readonly isScatterLarge: boolean;
}

/**
 * Uncertainty budget of a group's LEX,8h. By tasks: u² = Σ [c1a²(u1a² + u2² + u3²) + (c1b·u1b)²]. By job or full days:
 * u² = (c1u1)² + u2² + u3², the level being the samples' energy mean over the effective duration. U = 1.65·u; of
 * Student's t the 2009 edition asks nowhere (from memory).
 *
 * A code instead where the standard allows no statement: fewer than two samples of a task, three of a job or of days.
 *
 * @source iso-9612-2009 C.2, C.3, C.4
 */
export function budgetOfGroup(survey: GroupSurvey): GroupBudget | UncertaintyReason {
  const summary = summarize(survey);
  return typeof summary === "string" ? summary : budgetOf(summary);
}

/** A change to a survey that would narrow its result. */
export type SurveyChange =
  | {
      readonly kind: "more-samples";
      readonly taskId: string | null;
      readonly count: number;
    }
  | { readonly kind: "instrument"; readonly instrument: InstrumentClass }
  | {
      readonly kind: "duration";
      readonly taskId: string;
      readonly durationUncertaintyMin: number;
    };

export interface Narrowing {
  readonly change: SurveyChange;
  readonly expandedDb: number;
  /** By how much U falls, dB. */
  readonly decreaseDb: number;
}

const MORE_SAMPLES = 3;
const MORE_DAYS = 2;

/** Changes worth asking about: three more samples (two more days), a class 1 instrument, durations known twice as well. */
export function surveyChanges(survey: GroupSurvey): SurveyChange[] {
  const better: SurveyChange = { kind: "instrument", instrument: "class-1-meter" };
  if (survey.strategy !== "task") {
    const count = survey.strategy === "job" ? MORE_SAMPLES : MORE_DAYS;
    return [{ kind: "more-samples", taskId: null, count }, better];
  }
  return [
    ...survey.tasks.map(
      ({ taskId }): SurveyChange => ({ kind: "more-samples", taskId, count: MORE_SAMPLES }),
    ),
    better,
    ...survey.tasks.map(
      ({ taskId, durationUncertaintyMin }): SurveyChange => ({
        kind: "duration",
        taskId,
        durationUncertaintyMin: durationUncertaintyMin / 2,
      }),
    ),
  ];
}

/**
 * What would narrow a group's result most: each change put into the budget, level and scatter of the samples staying
 * what they are, by falling decrease of U. Changes that don't narrow it are left out; nothing where there is no budget.
 */
export function whatNarrowsMost(
  survey: GroupSurvey,
  changes: readonly SurveyChange[] = surveyChanges(survey),
): Narrowing[] {
  const summary = summarize(survey);
  if (typeof summary === "string") return [];
  const { expandedDb: nowDb } = budgetOf(summary);
  return changes
    .map((change) => {
      const { expandedDb } = budgetOf(changed(summary, change));
      return { change, expandedDb, decreaseDb: nowDb - expandedDb };
    })
    .filter(({ decreaseDb }) => decreaseDb > 1e-9)
    .sort((a, b) => b.decreaseDb - a.decreaseDb);
}

/** What of a task's samples, or of a job's, its budget hangs on. */
interface SampledPart {
  readonly taskId: string | null;
  readonly levelDb: number;
  readonly sampleCount: number;
  /** √(Σ(Li − L̄)² / (N − 1)). */
  readonly scatterDb: number;
  readonly durationMin: number;
  readonly durationUncertaintyMin: number;
  readonly instrument: InstrumentClass;
}

interface SurveySummary {
  readonly strategy: SurveyStrategy;
  readonly parts: readonly SampledPart[];
}

function summarize(survey: GroupSurvey): SurveySummary | UncertaintyReason {
  const isByTask = survey.strategy === "task";
  const tasks = isByTask
    ? survey.tasks.filter(({ durationMin }) => durationMin > 0)
    : [
        {
          taskId: null,
          samplesDb: survey.samplesDb,
          durationMin: survey.effectiveMin,
          durationUncertaintyMin: 0,
          instrument: survey.instrument,
        },
      ];
  if (tasks.length === 0) return "no-tasks";
  const least = isByTask ? 2 : LEAST_JOB_SAMPLES;
  if (tasks.some(({ samplesDb }) => samplesDb.length < least)) return "too-few-samples";
  const parts = tasks.map(({ samplesDb, ...part }) => ({
    ...part,
    levelDb: energyMeanDb(samplesDb),
    sampleCount: samplesDb.length,
    scatterDb: jobSamplingUncertaintyDb(samplesDb),
  }));
  return { strategy: survey.strategy, parts };
}

function changed(summary: SurveySummary, change: SurveyChange): SurveySummary {
  const parts = summary.parts.map((part) => {
    if (change.kind === "instrument") return { ...part, instrument: change.instrument };
    if (change.taskId !== part.taskId) return part;
    return change.kind === "more-samples"
      ? { ...part, sampleCount: part.sampleCount + change.count }
      : { ...part, durationUncertaintyMin: change.durationUncertaintyMin };
  });
  return { ...summary, parts };
}

function budgetOf({ strategy, parts }: SurveySummary): GroupBudget {
  const isByTask = strategy === "task";
  const weightOf = (part: SampledPart) => part.durationMin * 10 ** (part.levelDb / 10);
  const totalWeight = parts.reduce((sum, part) => sum + weightOf(part), 0);
  const budgetParts = parts.map(
    (part): BudgetPart => ({
      taskId: part.taskId,
      energyShare: weightOf(part) / totalWeight,
      durationMin: part.durationMin,
      samplingDb: isByTask
        ? part.scatterDb / Math.sqrt(part.sampleCount)
        : jobSamplingContributionDb(part.sampleCount, part.scatterDb),
      durationUncertaintyMin: part.durationUncertaintyMin,
      instrumentDb: INSTRUMENT_DB[part.instrument],
    }),
  );
  const { combinedDb, expandedDb, instrumentDb2, positionDb2 } = uncertaintyBudget(budgetParts);
  const item = (source: BudgetSource, taskId: string | null, contributionDb: number) => ({
    source,
    taskId,
    contributionDb,
    sharePct: 100 * (contributionDb / combinedDb) ** 2,
  });
  const items: BudgetItem[] = [
    item("instrument", null, Math.sqrt(instrumentDb2)),
    item("position", null, Math.sqrt(positionDb2)),
    ...budgetParts.map(({ taskId, energyShare, samplingDb }) =>
      item("sampling", taskId, energyShare * (samplingDb ?? 0)),
    ),
    ...budgetParts
      .filter(({ durationUncertaintyMin }) => durationUncertaintyMin > 0)
      .map(({ taskId, energyShare, durationMin, durationUncertaintyMin }) =>
        item(
          "duration",
          taskId,
          durationSensitivityDbPerMin(energyShare, durationMin) * durationUncertaintyMin,
        ),
      ),
  ];
  items.sort((a, b) => b.contributionDb - a.contributionDb);
  const scatterDb = isByTask ? null : parts[0]!.scatterDb;
  return {
    strategy,
    lexDb: 10 * Math.log10(totalWeight / REFERENCE_MIN),
    combinedDb,
    expandedDb,
    items,
    dominant: items[0]!,
    scatterDb,
    isScatterLarge: scatterDb !== null && scatterDb > LARGE_SCATTER_DB,
  };
}

/** T0, minutes. */
const REFERENCE_MIN = 480;
