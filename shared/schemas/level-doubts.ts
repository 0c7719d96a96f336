import { A_WEIGHTING_DB, weightedSumDb } from "../acoustics/protection/octave-band";
import { OCTAVE_BANDS_HZ, type OctaveBandValues } from "../acoustics/types";
import { taskLevelDb } from "../acoustics/uncertainty";

/** Further apart than that, a level and what stands beside it are asked about, dB. */
export const LEVEL_ASKED_FROM_DB = 1;

/** Binary fractions of tenths: 88.0 − 87.0 is not always exactly 1. */
const EPSILON = 1e-9;

/** What contradicts a task's level, unless an officer says that the level is right all the same. */
export const LEVEL_DOUBTS = ["level-off-bands", "level-off-samples"] as const;
export type LevelDoubtCode = (typeof LEVEL_DOUBTS)[number];

export interface LevelDoubt {
  readonly code: LevelDoubtCode;
  /** What the bands or the samples come to, and how far that lies from the level, dB. */
  readonly params: { readonly foundDb: number; readonly offDb: number };
}

interface LevelBeside {
  readonly metric: { readonly kind: string };
  readonly levelDb: unknown;
  readonly octaveBandsDb?: unknown;
  readonly samplesDb?: unknown;
}

export const isSpectrum = (bands: unknown): bands is OctaveBandValues =>
  Array.isArray(bands) &&
  bands.length === OCTAVE_BANDS_HZ.length &&
  bands.every((level, band) => typeof level === "number" || (band === 0 && level === null));

/** Levels at 5 dB exchange add up to neither: nothing is asked of them. Also asked of what is being typed. */
export function findLevelDoubts({
  metric,
  levelDb,
  octaveBandsDb,
  samplesDb,
}: LevelBeside): LevelDoubt[] {
  if (metric.kind === "lavg" || typeof levelDb !== "number") return [];
  const doubts: LevelDoubt[] = [];
  const compare = (code: LevelDoubtCode, foundDb: number) => {
    const offDb = foundDb - levelDb;
    if (Math.abs(offDb) > LEVEL_ASKED_FROM_DB + EPSILON)
      doubts.push({ code, params: { foundDb, offDb } });
  };
  if (isSpectrum(octaveBandsDb))
    compare("level-off-bands", weightedSumDb(octaveBandsDb, A_WEIGHTING_DB));
  if (
    Array.isArray(samplesDb) &&
    samplesDb.length > 0 &&
    samplesDb.every((sample) => typeof sample === "number")
  )
    compare("level-off-samples", taskLevelDb(samplesDb));
  return doubts;
}
