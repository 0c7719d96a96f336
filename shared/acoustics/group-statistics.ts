import {
  fTail,
  normalDensity,
  normalQuantile,
  normalShare,
  studentQuantile,
} from "./distributions";
import { energyMeanDb } from "./exposure";
import { arithmeticMean } from "./mean";
import { exceedanceBound, toleranceFactor } from "./noncentral-t";

/** A result of one worker of a group. */
export interface GroupSample {
  /** Null: taken at a place, or of somebody unnamed. */
  readonly workerId: string | null;
  /** Level, dB; where `isBelow`, the level under which it stayed. */
  readonly levelDb: number;
  readonly isBelow: boolean;
}

/** Below this number of samples a group's figures carry a warning. */
export const FEW_SAMPLES = 6;

/** Least values above their thresholds that a fit rests on. */
const LEAST_VALUES = 3;
/** With more of the samples below their thresholds than this a fit tells little but the thresholds. */
const MOST_BELOW_SHARE = 0.8;

export type GroupReason =
  /** Fewer than six samples. */
  | "few-samples"
  /** Fewer than two samples: no scatter. */
  | "too-few-samples"
  /** Fewer than three values, or all of them equal, beside samples below a threshold. */
  | "too-few-values"
  | "mostly-below-threshold"
  /** Fitted to samples below a threshold: the limit and the bound are approximate. */
  | "approximate-below-threshold";

export interface Exceedance {
  readonly levelDb: number;
  /** Share of the group's exposures above the level, 0 to 1: estimate and upper bound of 95 %. */
  readonly share: number;
  readonly shareUpTo: number;
}

export interface GroupDescription {
  readonly sampleCount: number;
  readonly belowCount: number;
  readonly workerCount: number;
  readonly meanDb: number | null;
  readonly sdDb: number | null;
  /**
   * Mean by energy; where samples lie below a threshold, that of the fitted distribution. Null where the levels are none
   * of energy: the TWA of a dose by another exchange rate, or with a threshold, has no mean by energy.
   */
  readonly energyMeanDb: number | null;
  /** K of the tolerance limit. */
  readonly toleranceFactor: number | null;
  /** With 95 % confidence, 95 % of the group's exposures lie below. */
  readonly toleranceLimitDb: number | null;
  /** One for each level asked for. */
  readonly exceedances: readonly Exceedance[];
  readonly reasons: readonly GroupReason[];
}

/**
 * Describes a group by its samples, levels taken as normally distributed (exposures as log-normal).
 *
 * Samples below a threshold enter by maximum likelihood, with sd·√(n/(n − 1)) so that the figures join those of complete
 * samples; K and the exceedance bound are then those of n complete samples, which is an approximation.
 *
 * @throws RangeError without a sample.
 * @source johnson-welch-1940
 * @source cohen-1961
 */
export function describeGroup(
  samples: readonly GroupSample[],
  levelsDb: readonly number[] = [],
  isEnergy = true,
): GroupDescription {
  const sampleCount = samples.length;
  if (sampleCount === 0) throw new RangeError("A group's figures need at least one sample");
  const values = samples.filter(({ isBelow }) => !isBelow).map(({ levelDb }) => levelDb);
  const belowCount = sampleCount - values.length;
  const counts = {
    sampleCount,
    belowCount,
    workerCount: new Set(samples.flatMap(({ workerId }) => workerId ?? [])).size,
  };
  const few: GroupReason[] = sampleCount < FEW_SAMPLES ? ["few-samples"] : [];
  const none = (reason: GroupReason | null): GroupDescription => ({
    ...counts,
    meanDb: reason === "too-few-samples" && belowCount === 0 ? values[0]! : null,
    sdDb: null,
    energyMeanDb: isEnergy && reason === "too-few-samples" && belowCount === 0 ? values[0]! : null,
    toleranceFactor: null,
    toleranceLimitDb: null,
    exceedances: [],
    reasons: reason === null ? few : [...few, reason],
  });
  if (sampleCount < 2) return none("too-few-samples");
  if (belowCount > 0) {
    if (values.length < LEAST_VALUES || new Set(values).size < 2) return none("too-few-values");
    if (belowCount > MOST_BELOW_SHARE * sampleCount) return none("mostly-below-threshold");
  }
  const { meanDb, sdDb } = belowCount === 0 ? moments(values) : unbiased(samples);
  const factor = toleranceFactor(sampleCount);
  const meanByEnergyDb =
    belowCount === 0 ? energyMeanDb(values) : meanDb + (Math.LN10 / 20) * sdDb * sdDb;
  const exceedances = levelsDb.map((levelDb) => ({
    levelDb,
    ...exceedanceOf(sampleCount, meanDb, sdDb, levelDb),
  }));
  return {
    ...counts,
    meanDb,
    sdDb,
    energyMeanDb: isEnergy ? meanByEnergyDb : null,
    toleranceFactor: factor,
    toleranceLimitDb: meanDb + factor * sdDb,
    exceedances,
    reasons: belowCount === 0 ? few : [...few, "approximate-below-threshold"],
  };
}

function exceedanceOf(
  sampleCount: number,
  meanDb: number,
  sdDb: number,
  levelDb: number,
): { share: number; shareUpTo: number } {
  if (sdDb === 0) {
    // Equal samples: the fitted distribution is a point.
    const share = meanDb > levelDb ? 1 : 0;
    return { share, shareUpTo: share };
  }
  const distance = (levelDb - meanDb) / sdDb;
  return { share: normalShare(-distance), shareUpTo: exceedanceBound(sampleCount, distance) };
}

function moments(values: readonly number[]): { meanDb: number; sdDb: number } {
  const meanDb = arithmeticMean(values);
  let squares = 0;
  for (const value of values) squares += (value - meanDb) ** 2;
  return { meanDb, sdDb: Math.sqrt(squares / (values.length - 1)) };
}

function unbiased(samples: readonly GroupSample[]): { meanDb: number; sdDb: number } {
  const { meanDb, sdDb } = fitBelowThreshold(samples);
  return { meanDb, sdDb: sdDb * Math.sqrt(samples.length / (samples.length - 1)) };
}

/**
 * Mean and standard deviation (divisor n) of the normal distribution under which the samples are likeliest, those below
 * a threshold, each its own, counting as somewhere below it. By expectation and maximization: a sample below c is
 * replaced by its mean μ − σ·h and square, h = φ(z)/Φ(z) with z = (c − μ)/σ, until nothing changes.
 *
 * @throws RangeError without two different values above their thresholds.
 * @source cohen-1961
 */
export function fitBelowThreshold(samples: readonly GroupSample[]): {
  meanDb: number;
  sdDb: number;
} {
  const values = samples.filter(({ isBelow }) => !isBelow).map(({ levelDb }) => levelDb);
  if (new Set(values).size < 2) throw new RangeError("A fit needs two different values");
  const thresholds = samples.filter(({ isBelow }) => isBelow).map(({ levelDb }) => levelDb);
  const count = samples.length;
  let { meanDb, sdDb } = moments(values);
  for (let step = 0; step < 20_000; step++) {
    let sum = 0;
    let squares = 0;
    for (const value of values) {
      sum += value - meanDb;
      squares += (value - meanDb) ** 2;
    }
    for (const threshold of thresholds) {
      const z = (threshold - meanDb) / sdDb;
      const hazard = z < -30 ? -z : normalDensity(z) / normalShare(z);
      sum -= sdDb * hazard;
      squares += sdDb * sdDb * (1 - z * hazard);
    }
    const shift = sum / count;
    const next = Math.sqrt(Math.max(0, squares / count - shift * shift));
    const change = Math.abs(shift) + Math.abs(next - sdDb);
    meanDb += shift;
    sdDb = next;
    if (change < 1e-12) break;
  }
  return { meanDb, sdDb };
}

export interface PlotPoint {
  readonly workerId: string | null;
  readonly levelDb: number;
  /** Share of the group's exposures below, 0 to 1, and its place on a normal scale. */
  readonly share: number;
  readonly z: number;
}

/**
 * Points of a probability plot, by rising level: rank/(n + 1), and between samples below several thresholds the
 * positions by which each threshold divides the rest. Samples below a threshold have no point of their own.
 *
 * @source hirsch-stedinger-1987
 */
export function probabilityPlot(samples: readonly GroupSample[]): PlotPoint[] {
  const below = samples.filter(({ isBelow }) => isBelow);
  const values = samples.filter(({ isBelow }) => !isBelow);
  const thresholds = [...new Set(below.map(({ levelDb }) => levelDb))].sort((a, b) => a - b);
  const edges = [Number.NEGATIVE_INFINITY, ...thresholds, Number.POSITIVE_INFINITY];
  const points: PlotPoint[] = [];
  let above = 0;
  for (let place = thresholds.length; place >= 0; place--) {
    const fromDb = edges[place]!;
    const group = values
      .filter(({ levelDb }) => levelDb >= fromDb && levelDb < edges[place + 1]!)
      .sort((a, b) => a.levelDb - b.levelDb);
    const lower =
      values.filter(({ levelDb }) => levelDb < fromDb).length +
      below.filter(({ levelDb }) => levelDb <= fromDb).length;
    const atOrAbove =
      place === 0 ? 1 : above + (group.length / Math.max(1, group.length + lower)) * (1 - above);
    for (let rank = group.length; rank >= 1; rank--) {
      const { workerId, levelDb } = group[rank - 1]!;
      const share = 1 - atOrAbove + ((atOrAbove - above) * rank) / (group.length + 1);
      points.push({ workerId, levelDb, share, z: normalQuantile(share) });
    }
    above = atOrAbove;
  }
  return points.reverse();
}

/**
 * Critical value of the greatest distance from the mean in standard deviations, two-sided: ((n − 1)/√n)·√(t²/(n − 2 + t²))
 * with t of n − 2 degrees at α/(2n).
 *
 * @throws RangeError below three values.
 * @source grubbs-1969
 */
export function grubbsCritical(count: number, alpha = 0.05): number {
  if (!(count >= 3)) throw new RangeError("An outlier needs at least three values");
  const square = studentQuantile(alpha / (2 * count), count - 2) ** 2;
  return ((count - 1) / Math.sqrt(count)) * Math.sqrt(square / (count - 2 + square));
}

export interface WorkerMean {
  readonly workerId: string;
  readonly sampleCount: number;
  readonly meanDb: number;
  /** Distance from the mean of the workers' means in their standard deviations; null below three workers. */
  readonly distance: number | null;
  readonly isOutlier: boolean;
}

export interface WorkerOutliers {
  readonly workers: readonly WorkerMean[];
  /** Critical value of `distance` at 5 %; null below three workers. */
  readonly critical: number | null;
  /** Workers left aside because a sample of theirs lies below a threshold. */
  readonly leftAsideIds: readonly string[];
}

/**
 * Workers' means, by falling level, and the one that stands apart if one does: Grubbs' test at 5 % names the farthest
 * or none.
 *
 * @source grubbs-1969
 */
export function workerOutliers(samples: readonly GroupSample[]): WorkerOutliers {
  const { byWorker, leftAsideIds } = completeWorkers(samples);
  const means = [...byWorker].map(([workerId, values]) => ({
    workerId,
    sampleCount: values.length,
    meanDb: arithmeticMean(values),
  }));
  means.sort((a, b) => b.meanDb - a.meanDb);
  const scatter = means.length < 3 ? null : moments(means.map(({ meanDb }) => meanDb));
  if (scatter === null) {
    const workers = means.map((one) => ({ ...one, distance: null, isOutlier: false }));
    return { workers, critical: null, leftAsideIds };
  }
  const critical = grubbsCritical(means.length);
  const distances = means.map(({ meanDb }) =>
    scatter.sdDb === 0 ? 0 : Math.abs(meanDb - scatter.meanDb) / scatter.sdDb,
  );
  const farthest = distances.indexOf(Math.max(...distances));
  return {
    workers: means.map((one, place) => ({
      ...one,
      distance: distances[place]!,
      isOutlier: place === farthest && distances[place]! > critical,
    })),
    critical,
    leftAsideIds,
  };
}

function completeWorkers(samples: readonly GroupSample[]): {
  byWorker: Map<string, number[]>;
  leftAsideIds: string[];
} {
  const byWorker = new Map<string, number[]>();
  const below = new Set<string>();
  for (const { workerId, levelDb, isBelow } of samples) {
    if (workerId === null) continue;
    if (isBelow) below.add(workerId);
    const values = byWorker.get(workerId);
    if (values) values.push(levelDb);
    else byWorker.set(workerId, [levelDb]);
  }
  for (const workerId of below) byWorker.delete(workerId);
  return { byWorker, leftAsideIds: [...below] };
}

export type BelongingVerdict = "differ" | "no-difference-shown" | "cant-tell";
export type BelongingReason =
  | "one-worker"
  /** No worker with two samples. */
  | "no-repeats"
  | "no-scatter";

export interface Belonging {
  readonly verdict: BelongingVerdict;
  /** Why it can't be told; else null. */
  readonly reason: BelongingReason | null;
  readonly workerCount: number;
  readonly sampleCount: number;
  /** Standard deviations between workers and from day to day within one, dB. */
  readonly betweenDb: number | null;
  readonly withinDb: number | null;
  /** Share of the variance that lies between workers, 0 to 1. */
  readonly betweenShare: number | null;
  /** Range that holds the long-term means of 95 % of such workers, dB. */
  readonly workerSpanDb: number | null;
  readonly f: number | null;
  readonly degreesBetween: number;
  readonly degreesWithin: number;
  /** Probability of so great an F if all were alike. */
  readonly probability: number | null;
  readonly leftAsideIds: readonly string[];
}

/**
 * Whether the members of a group belong together: one-way analysis of variance with workers as classes of unequal size.
 * The variance between workers is (MSb − MSw)/n₀ with n₀ = (N − Σn²/N)/(k − 1), and not below 0. They differ where F has
 * a probability below 5 %. That no difference shows does not prove that there is none.
 *
 * @source searle-1992
 */
export function groupBelonging(samples: readonly GroupSample[]): Belonging {
  const { byWorker, leftAsideIds } = completeWorkers(samples);
  const groups = [...byWorker.values()];
  const sampleCount = groups.reduce((sum, { length }) => sum + length, 0);
  const degreesBetween = Math.max(0, groups.length - 1);
  const degreesWithin = sampleCount - groups.length;
  const base = {
    workerCount: groups.length,
    sampleCount,
    degreesBetween,
    degreesWithin,
    leftAsideIds,
  };
  const untold = (reason: BelongingReason): Belonging => ({
    ...base,
    verdict: "cant-tell",
    reason,
    betweenDb: null,
    withinDb: null,
    betweenShare: null,
    workerSpanDb: null,
    f: null,
    probability: null,
  });
  if (groups.length < 2) return untold("one-worker");
  if (degreesWithin === 0) return untold("no-repeats");
  const grand = arithmeticMean(groups.flat());
  let between = 0;
  let within = 0;
  let sizeSquares = 0;
  for (const values of groups) {
    const own = arithmeticMean(values);
    between += values.length * (own - grand) ** 2;
    for (const value of values) within += (value - own) ** 2;
    sizeSquares += values.length ** 2;
  }
  const meanBetween = between / degreesBetween;
  const meanWithin = within / degreesWithin;
  if (meanWithin === 0) return untold("no-scatter");
  const typicalSize = (sampleCount - sizeSquares / sampleCount) / degreesBetween;
  const betweenDb2 = Math.max(0, (meanBetween - meanWithin) / typicalSize);
  const f = meanBetween / meanWithin;
  const probability = fTail(f, degreesBetween, degreesWithin);
  return {
    ...base,
    verdict: probability < 0.05 ? "differ" : "no-difference-shown",
    reason: null,
    betweenDb: Math.sqrt(betweenDb2),
    withinDb: Math.sqrt(meanWithin),
    betweenShare: betweenDb2 / (betweenDb2 + meanWithin),
    workerSpanDb: 2 * normalQuantile(0.975) * Math.sqrt(betweenDb2),
    f,
    degreesBetween,
    degreesWithin,
    probability,
  };
}
