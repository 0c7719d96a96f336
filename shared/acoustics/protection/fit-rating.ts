import { normalQuantile } from "../distributions";
import { arithmeticMean } from "../mean";
import { boneConductionLimitDb } from "./bone-conduction";
import { sampleDeviation } from "./ratings";

/** What a fit test found at one ear, dB. */
export interface EarRating {
  readonly meanDb: number;
  readonly trialCount: number;
  /** Standard deviation between trials; null of a single one, whose donning says nothing of the next. */
  readonly betweenTrialsDb: number | null;
  /** Standard uncertainty of the mean: of the trials over their number, and of the method. */
  readonly uncertaintyDb: number;
  /** Reached or passed with the stated confidence. */
  readonly parDb: number;
}

export interface FitRating {
  /** Null: that ear was not tried. */
  readonly left: EarRating | null;
  readonly right: EarRating | null;
  readonly weakerEar: "left" | "right";
  /** The personal attenuation of the weaker ear with the stated confidence, dB. */
  readonly parDb: number;
  readonly confidencePct: number;
  /** One ear only was tried: its rating is the most that the pair can have. */
  readonly isOneEar: boolean;
  /** Some ear has a single trial, so that the spread between donnings is not in the uncertainty. */
  readonly hasSingleTrial: boolean;
  /** Against what the noise asks for; null: no need is known, nothing has to come off, or one ear was not tried and may be the weaker. */
  readonly hasPassed: boolean | null;
  /** By how far the ears that were tried pass the need, dB. */
  readonly marginDb: number | null;
}

export type FitOutcome =
  | { readonly rating: FitRating; readonly refusal: null }
  | { readonly rating: null; readonly refusal: FitRefusal };

export type FitRefusal = { readonly code: "no-trial" } | ImpossibleTrial;

export interface ImpossibleTrial {
  readonly code: "above-bone-conduction";
  readonly ear: "left" | "right";
  /** Which trial of that ear, from 1. */
  readonly trial: number;
  /** What it is said to have taken off, and what an ear can have, dB. */
  readonly foundDb: number;
  readonly limitDb: number;
}

export interface FitTrials {
  /** Attenuation by trial, each after a donning of its own, dB. */
  readonly leftDb: readonly number[];
  readonly rightDb: readonly number[];
  /** The method's own standard uncertainty, dB. */
  readonly methodSdDb: number;
  readonly confidencePct: number;
  readonly needDb: number | null;
}

/**
 * A worker's personal attenuation rating from trials at both ears: by ear the mean less z·u, one-sided, with
 * u² = s²/n + u_method² (a single trial has no s: then u_method alone, and the result says so). The weaker ear governs.
 * z is the exact quantile (0.9945 at 84 %); the octave-band α of ISO 4869-2 is its table's, rounded (1.00 at 84 %).
 * Refused where a single trial lies above what the skull lets be reached: a mean would hide it.
 *
 * @throws RangeError for a confidence not between 0 and 100.
 * @source iso-guide-98-3 4.2, 5.1
 * @source berger-2003 bone-conduction limits, head uncovered
 */
export function fitRating(trials: FitTrials): FitOutcome {
  const z = normalQuantile(trials.confidencePct / 100);
  const left = earRating(trials.leftDb, trials.methodSdDb, z);
  const right = earRating(trials.rightDb, trials.methodSdDb, z);
  const ears = [left, right].filter((ear) => ear !== null);
  if (ears.length === 0) return { rating: null, refusal: { code: "no-trial" } };
  const [refusal] = impossibleTrials(trials);
  if (refusal) return { rating: null, refusal };
  const isLeftWeaker = right === null || (left !== null && left.parDb <= right.parDb);
  const parDb = Math.min(...ears.map((ear) => ear.parDb));
  const { confidencePct } = trials;
  const isOneEar = ears.length === 1;
  const hasPassed = pairPasses(parDb, trials.needDb, isOneEar);
  return {
    rating: {
      left,
      right,
      weakerEar: isLeftWeaker ? "left" : "right",
      parDb,
      confidencePct,
      isOneEar,
      hasSingleTrial: ears.some(({ betweenTrialsDb }) => betweenTrialsDb === null),
      hasPassed,
      marginDb: hasToPass(trials.needDb) ? parDb - trials.needDb : null,
    },
    refusal: null,
  };
}

/** The ear that a test has no rating of; null: both were tried, or it rates none. Both in dB. */
export function earNotTried({
  leftDb,
  rightDb,
}: {
  readonly leftDb: number | null;
  readonly rightDb: number | null;
}): "left" | "right" | null {
  if ((leftDb === null) === (rightDb === null)) return null;
  return leftDb === null ? "left" : "right";
}

/** Where nothing has to come off, any fit would do: that is no passing. */
export const hasToPass = (needDb: number | null): needDb is number => needDb !== null && needDb > 0;

/** Null: no need is known, or nothing has to come off. Both in dB. */
export const passesNeed = (parDb: number, needDb: number | null): boolean | null =>
  hasToPass(needDb) ? parDb >= needDb : null;

/** One ear that falls short settles it for both; one that reaches the need says nothing of the other. */
function pairPasses(parDb: number, needDb: number | null, isOneEar: boolean): boolean | null {
  const passes = passesNeed(parDb, needDb);
  return isOneEar && passes ? null : passes;
}

/** Every trial that nobody’s skull allows, the left ear’s first. What is not a number takes its place and is passed over. */
export function impossibleTrials(trials: {
  readonly leftDb: readonly unknown[];
  readonly rightDb: readonly unknown[];
}): ImpossibleTrial[] {
  const limitDb = boneConductionLimitDb();
  const ofEar = (ear: "left" | "right", trialsDb: readonly unknown[]) =>
    trialsDb.flatMap((foundDb, at) =>
      typeof foundDb === "number" && foundDb > limitDb
        ? [{ code: "above-bone-conduction" as const, ear, trial: at + 1, foundDb, limitDb }]
        : [],
    );
  return [...ofEar("left", trials.leftDb), ...ofEar("right", trials.rightDb)];
}

function earRating(trialsDb: readonly number[], methodSdDb: number, z: number): EarRating | null {
  if (trialsDb.length === 0) return null;
  const meanDb = arithmeticMean(trialsDb);
  const betweenTrialsDb = trialsDb.length === 1 ? null : sampleDeviation(trialsDb);
  const uncertaintyDb = Math.hypot((betweenTrialsDb ?? 0) / Math.sqrt(trialsDb.length), methodSdDb);
  return {
    meanDb,
    trialCount: trialsDb.length,
    betweenTrialsDb,
    uncertaintyDb,
    parDb: meanDb - z * uncertaintyDb,
  };
}

/** A group's own fits of one model. */
export interface GroupFits {
  readonly count: number;
  readonly meanDb: number;
  /** Null of a single one. */
  readonly sdDb: number | null;
  /** Mean of the fits less what the label promises, dB; null without one. */
  readonly againstLabelDb: number | null;
  /** Of those whose need is known, the share that stay below it, percent; null: of none. */
  readonly belowNeedPct: number | null;
}

/**
 * A group's fits of one model against its label.
 *
 * @throws RangeError without any.
 */
export function groupFits(
  fits: readonly { readonly parDb: number; readonly needDb: number | null }[],
  labelDb: number | null,
): GroupFits {
  if (fits.length === 0) throw new RangeError("A group's fits need at least one");
  const pars = fits.map(({ parDb }) => parDb);
  const meanDb = arithmeticMean(pars);
  const needed = fits.filter(({ needDb }) => needDb !== null);
  const below = needed.filter(({ parDb, needDb }) => parDb < needDb!);
  return {
    count: fits.length,
    meanDb,
    sdDb: pars.length < 2 ? null : sampleDeviation(pars),
    againstLabelDb: labelDb === null ? null : meanDb - labelDb,
    belowNeedPct: needed.length === 0 ? null : (100 * below.length) / needed.length,
  };
}
