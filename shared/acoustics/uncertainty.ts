import { energyMeanDb } from "./exposure";
import type { InstrumentClass, UncertaintyReason } from "./types";

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

/**
 * Contribution c1·u1 of N job-based or full-day samples with scatter u1, dB: the one-sided 95 % confidence limit of a
 * log-normal mean (Land), above the estimate by energy, over 1.65. The standard prints it as a table; this computes it.
 *
 * @throws RangeError below three samples, where it is not defined.
 * @source iso-9612-2009 C.3.2 Table C.4
 * @source land-1971
 */
export function jobSamplingContributionDb(sampleCount: number, scatterDb: number): number {
  if (!(sampleCount >= 3))
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

function arithmeticMean(values: readonly number[]): number {
  let sum = 0;
  for (const value of values) sum += value;
  return sum / values.length;
}
