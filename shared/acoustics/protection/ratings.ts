import { arithmeticMean } from "../mean";
import type {
  BandAttenuation,
  OctaveBandValues,
  ProtectorData,
  UsLabelAttenuation,
} from "../types";
import { US_LABEL_HZ } from "../types";
import { A_WEIGHTING_DB, assumedAttenuationDb, hmlOfBandsDb, snrOfBandsDb } from "./octave-band";

/** H, M, L and SNR of a label, dB, before they are rounded to it. */
export interface EuropeanRatings {
  readonly hDb: number;
  readonly mDb: number;
  readonly lDb: number;
  readonly snrDb: number;
}

/**
 * H, M, L and SNR from the means and deviations over all subjects, dB: of mean − α·deviation by band.
 *
 * @source iso-4869-2 5, 7, 8 of 1994
 */
export function pooledRatings(bands: BandAttenuation, alpha = 1): EuropeanRatings {
  return ratingsOf(assumedAttenuationDb(bands, alpha));
}

/**
 * H, M, L and SNR as the later edition has them, dB: of every subject's own attenuation, and of these the mean less α
 * times their standard deviation.
 *
 * @throws RangeError for fewer than two subjects, which have no deviation.
 * @source iso-4869-2 5, 7, 8 of 2018, from memory
 */
export function perSubjectRatings(
  subjectsDb: readonly OctaveBandValues[],
  alpha = 1,
): EuropeanRatings {
  const each = subjectsDb.map(ratingsOf);
  const of = (rating: keyof EuropeanRatings): number =>
    meanLessDeviations(
      each.map((one) => one[rating]),
      alpha,
    );
  return { hDb: of("hDb"), mDb: of("mDb"), lDb: of("lDb"), snrDb: of("snrDb") };
}

const ratingsOf = (attenuationDb: OctaveBandValues): EuropeanRatings => ({
  ...hmlOfBandsDb(attenuationDb),
  snrDb: snrOfBandsDb(attenuationDb),
});

function meanLessDeviations(values: readonly number[], alpha: number): number {
  return arithmeticMean(values) - alpha * sampleDeviation(values);
}

/**
 * Standard deviation of a sample, n − 1.
 *
 * @throws RangeError for fewer than two values.
 */
export function sampleDeviation(values: readonly number[]): number {
  if (values.length < 2) throw new RangeError("A deviation needs two values");
  const mean = arithmeticMean(values);
  let squares = 0;
  for (const value of values) squares += (value - mean) ** 2;
  return Math.sqrt(squares / (values.length - 1));
}

/** What the US label takes for differences between spectra, dB. @source epa-40-cfr-211 211.207, step 9 */
const SPECTRAL_UNCERTAINTY_DB = 3;
const PINK_BAND_DB = 100;
/**
 * Pink noise of 100 dB a band, C-weighted: a constant of the regulation, printed with one decimal and used so in step 9,
 * though the bands add up to 107.95. @source epa-40-cfr-211 211.207, figure 2, step 3
 */
const OUTSIDE_C_DB = 107.9;

/**
 * The US single number from its own test frequencies, dB, before it is rounded (a half to the next lower whole
 * number): pink noise from 125 Hz, C-weighted (step 3, a constant), less what is left of it A-weighted behind mean − 2 deviations, less 3.
 * 3150 and 4000 Hz stand for one octave as their mean, and so do 6300 and 8000 Hz; octave bands alone can't give it.
 *
 * @throws RangeError unless there is one value for each test frequency.
 * @source epa-40-cfr-211 211.207, figure 2
 */
export function usRatingOfLabelDb({ meanDb, sdDb }: UsLabelAttenuation): number {
  if (meanDb.length !== US_LABEL_HZ.length || sdDb.length !== US_LABEL_HZ.length)
    throw new RangeError("The US label needs one value for each of its test frequencies");
  const means = asOctaves(meanDb);
  const deviations = asOctaves(sdDb);
  let atEar = 0;
  for (const [index, meanOfBandDb] of means.entries()) {
    const band = index + 1; // There is no 63 Hz band in it.
    const lossDb = meanOfBandDb - 2 * deviations[index]!;
    atEar += 10 ** ((PINK_BAND_DB + A_WEIGHTING_DB[band]! - lossDb) / 10);
  }
  return OUTSIDE_C_DB - 10 * Math.log10(atEar) - SPECTRAL_UNCERTAINTY_DB;
}

function asOctaves(atLabelHz: readonly number[]): number[] {
  const [at125, at250, at500, at1000, at2000, at3150, at4000, at6300, at8000] = atLabelHz as [
    number,
    number,
    number,
    number,
    number,
    number,
    number,
    number,
    number,
  ];
  return [at125, at250, at500, at1000, at2000, (at3150 + at4000) / 2, (at6300 + at8000) / 2];
}

/** The whole number on a US label: a half goes down. @source epa-40-cfr-211 211.207, step 9 */
export function roundedUsRating(ratingDb: number): number {
  return Math.ceil(ratingDb - 0.5);
}

/** Least SLC80 of each class from 1, dB. */
const CLASS_FROM_DB = [10, 14, 18, 22, 26] as const;

/**
 * Australian class of a protector, 1 to 5; null below the first.
 *
 * @source as-nzs-1270 App. A, from memory: 10, 14, 18, 22 and 26 dB
 */
export function australianClass(slc80Db: number): 1 | 2 | 3 | 4 | 5 | null {
  const reached = CLASS_FROM_DB.filter((fromDb) => slc80Db >= fromDb).length;
  return reached === 0 ? null : (reached as 1 | 2 | 3 | 4 | 5);
}

export type RatingName = "h" | "m" | "l" | "snr" | "us" | "slc80";

/** A label's rating beside what its own test data give. */
export interface RatingComparison {
  readonly rating: RatingName;
  readonly labelDb: number | null;
  /** Not rounded; null where the data can't give it. */
  readonly recomputedDb: number | null;
  /** Label less recomputed, dB; null where either is missing. */
  readonly differenceDb: number | null;
  /** How it was recomputed. */
  readonly by: "pooled" | "per-subject" | "us-label" | null;
  /** Why it isn't, though there are test data; null: it is, or there are none. */
  readonly reason: "deviation-invalid" | null;
  /** Further apart than rounding to whole numbers explains. */
  readonly isAtOdds: boolean;
}

/** Half a decibel of rounding, and as much for bands printed to a tenth or with and without 63 Hz, dB. */
const ROUNDING_DB = 1;

/**
 * H, M, L, SNR and the US number of a model beside what its test data give. Subjects, where they are known, come before
 * means and deviations. SLC80 is taken from the label: its reference noise stands in a document that nobody here has read.
 *
 * @source iso-4869-2 5, 7, 8
 * @source epa-40-cfr-211 211.207
 */
export function compareRatings(data: ProtectorData): RatingComparison[] {
  const { bands, usLabel, subjectsDb } = data;
  const by = subjectsDb ? "per-subject" : bands ? "pooled" : null;
  const isInvalid = !subjectsDb && bands !== null && !hasDeviations(bands);
  const european = subjectsDb
    ? perSubjectRatings(subjectsDb)
    : bands && !isInvalid
      ? pooledRatings(bands)
      : null;
  const isUsInvalid = usLabel ? !hasDeviations(usLabel) : false;
  const usDb = usLabel && !isUsInvalid ? usRatingOfLabelDb(usLabel) : undefined;
  return [
    compared("h", data.hDb, european?.hDb, by, isInvalid),
    compared("m", data.mDb, european?.mDb, by, isInvalid),
    compared("l", data.lDb, european?.lDb, by, isInvalid),
    compared("snr", data.snrDb, european?.snrDb, by, isInvalid),
    compared("us", data.usRatingDb, usDb, "us-label", isUsInvalid),
    compared("slc80", data.slc80Db, undefined, null, false),
  ];
}

/** A deviation is the root of a square: below zero it is a typing error, and would add to what the protector takes off. */
const hasDeviations = ({ sdDb }: { readonly sdDb: readonly (number | null)[] }): boolean =>
  sdDb.every((db) => db === null || db >= 0);

function compared(
  rating: RatingName,
  labelDb: number | null,
  recomputed: number | undefined,
  by: RatingComparison["by"],
  isInvalid: boolean,
): RatingComparison {
  const recomputedDb = recomputed ?? null;
  const differenceDb = labelDb === null || recomputedDb === null ? null : labelDb - recomputedDb;
  return {
    rating,
    labelDb,
    recomputedDb,
    differenceDb,
    by: recomputedDb === null ? null : by,
    reason: isInvalid ? "deviation-invalid" : null,
    isAtOdds: differenceDb !== null && Math.abs(differenceDb) > ROUNDING_DB,
  };
}
