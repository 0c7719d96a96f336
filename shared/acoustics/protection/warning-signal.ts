import { OCTAVE_BANDS_HZ, type OctaveBandValues, type Protection } from "../types";
import { activeAttenuationDb } from "./active";
import { combinationAttenuationDb } from "./bone-conduction";
import { mapBands } from "./octave-band";

/** How far a masked threshold falls from one octave band to the next above it, dB. @source iso-7731 Annex B */
const MASKING_SLOPE_DB = 7.5;
/** By how much a signal has to stand out in one octave band, dB. @source iso-7731 5.2.2.3 */
export const AUDIBLE_ABOVE_DB = 10;

/**
 * Threshold of hearing at the octave frequencies, tones from the front in a free field, dB.
 *
 * @source iso-389-7 Table 1, from memory
 */
export const HEARING_THRESHOLD_DB: OctaveBandValues = [
  37.5, 22.1, 11.4, 4.4, 2.4, -1.3, -5.4, 12.6,
];

/**
 * Threshold at which a signal is just masked by a noise, by octave band, dB: the noise of the band itself, or that of
 * the bands below carried upwards, 7.5 dB less for each octave.
 *
 * @source iso-7731 Annex B
 */
export function maskedThresholdDb(noiseDb: OctaveBandValues): OctaveBandValues {
  let carriedDb = Number.NEGATIVE_INFINITY;
  return mapBands((band) => {
    const bandDb = noiseDb[band] ?? null;
    if (bandDb === null) return null;
    carriedDb = Math.max(bandDb, carriedDb - MASKING_SLOPE_DB);
    return carriedDb;
  });
}

export interface SignalBand {
  readonly frequencyHz: number;
  /** At the ear, unweighted, dB. */
  readonly signalDb: number;
  readonly noiseDb: number;
  readonly maskedThresholdDb: number;
  readonly hearingThresholdDb: number;
  /** Signal above the masked threshold, dB. */
  readonly aboveDb: number;
  readonly isAudible: boolean;
}

export interface Heard {
  readonly isAudible: boolean;
  /** The band in which it stands out most of those above the threshold of hearing, else of all. */
  readonly bestBandHz: number;
  /** By how much it does, dB above the masked threshold. */
  readonly aboveDb: number;
  readonly bands: readonly SignalBand[];
}

/** Null with the reason why it can't be said. */
export type SignalHeard =
  | { readonly off: Heard; readonly on: Heard | null; readonly reason: null }
  | {
      readonly off: null;
      readonly on: null;
      readonly reason: "no-attenuation-data" | "combination-not-tested";
    };

/**
 * Whether a warning signal stays audible at the ear over the noise that is left there: both pass the protector band by
 * band (its mean attenuation: half of the users hear less), and in at least one octave band the signal passes the masked
 * threshold by 10 dB and lies above the threshold of hearing. Active part off and on; null protection: the bare ear. A
 * saturated active part passes both as it does when off.
 *
 * Levels are unweighted octave bands at the worker's place, dB.
 *
 * @source iso-7731 5.2.2.3, Annex B
 * @source iso-389-7 Table 1
 */
export function hearSignal(
  signalDb: OctaveBandValues,
  noiseDb: OctaveBandValues,
  protection: Protection | null,
  outsideDb: number,
): SignalHeard {
  if (protection === null)
    return { off: heard(signalDb, noiseDb, NO_LOSS_DB), on: null, reason: null };
  const { inner, outer, combinationBands } = protection;
  if (outer !== null) {
    return combinationBands === null
      ? { off: null, on: null, reason: "combination-not-tested" }
      : {
          off: heard(signalDb, noiseDb, combinationAttenuationDb(combinationBands, 0)),
          on: null,
          reason: null,
        };
  }
  if (inner.bands === null) return { off: null, on: null, reason: "no-attenuation-data" };
  const passiveDb = inner.bands.meanDb;
  const off = heard(signalDb, noiseDb, passiveDb);
  const activeDb = inner.active && activeAttenuationDb(inner.active);
  if (!inner.active || !activeDb) return { off, on: null, reason: null };
  const saturatesDb = inner.active.saturatesAboveDb;
  if (saturatesDb !== null && outsideDb > saturatesDb) return { off, on: off, reason: null };
  const bothDb = mapBands((band) => {
    const bandDb = passiveDb[band] ?? null;
    return bandDb === null ? null : bandDb + (activeDb[band] ?? 0);
  });
  return { off, on: heard(signalDb, noiseDb, bothDb), reason: null };
}

const NO_LOSS_DB: OctaveBandValues = [0, 0, 0, 0, 0, 0, 0, 0];

function heard(
  signalDb: OctaveBandValues,
  noiseDb: OctaveBandValues,
  lossDb: OctaveBandValues,
): Heard {
  const behind = (spectrumDb: OctaveBandValues): OctaveBandValues =>
    mapBands((band) => {
      const levelDb = spectrumDb[band] ?? null;
      const bandLossDb = lossDb[band] ?? null;
      return levelDb === null || bandLossDb === null ? null : levelDb - bandLossDb;
    });
  const noiseAtEarDb = behind(noiseDb);
  const signalAtEarDb = behind(signalDb);
  const maskedDb = maskedThresholdDb(noiseAtEarDb);
  const bands = OCTAVE_BANDS_HZ.flatMap((frequencyHz, band): SignalBand[] => {
    const levelDb = signalAtEarDb[band];
    const thresholdDb = maskedDb[band];
    const hearingDb = HEARING_THRESHOLD_DB[band];
    const leftDb = noiseAtEarDb[band];
    if (levelDb == null || thresholdDb == null || hearingDb == null || leftDb == null) return [];
    const aboveDb = levelDb - thresholdDb;
    return [
      {
        frequencyHz,
        signalDb: levelDb,
        noiseDb: leftDb,
        maskedThresholdDb: thresholdDb,
        hearingThresholdDb: hearingDb,
        aboveDb,
        isAudible: aboveDb >= AUDIBLE_ABOVE_DB - MACHINE_NOISE_DB && levelDb > hearingDb,
      },
    ];
  });
  const best = bands.reduce((a, b) => (isBetter(b, a) ? b : a));
  return {
    isAudible: best.isAudible,
    bestBandHz: best.frequencyHz,
    aboveDb: best.aboveDb,
    bands,
  };
}

/** Levels taken off both and compared again differ by less. */
const MACHINE_NOISE_DB = 1e-9;

function isBetter(band: SignalBand, other: SignalBand): boolean {
  const isOverThreshold = (one: SignalBand) => one.signalDb > one.hearingThresholdDb;
  return isOverThreshold(band) === isOverThreshold(other)
    ? band.aboveDb > other.aboveDb
    : isOverThreshold(band);
}
