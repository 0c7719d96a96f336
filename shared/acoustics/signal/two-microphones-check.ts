import { A_WEIGHTING_DB } from "../protection/octave-band";
import { OCTAVE_BANDS_HZ, type OctaveBandValues } from "../types";
import type { BandReason, MeasuredBand } from "./two-microphones";

/** One value by band of `OCTAVE_BANDS_HZ`; null: the band says nothing. */
export type BandsOrNull = readonly (number | null)[];

export interface ReducedBand extends MeasuredBand {
  /** Outside less inside, dB. */
  readonly noiseReductionDb: number | null;
}

export interface EarAttenuation {
  readonly noiseReductionDb: BandsOrNull;
  /** With the correction to the open ear. */
  readonly attenuationDb: BandsOrNull;
  /** With the active part on less with it off; null: no such pair. */
  readonly activeDb: BandsOrNull | null;
}

/** Correction where none is stated: the noise reduction is taken for the attenuation. */
export const NO_CORRECTION_DB: BandsOrNull = OCTAVE_BANDS_HZ.map(() => 0);

/**
 * From outside the cup to the eardrum of the open ear in a diffuse field, dB by octave: energy means of the standard's
 * third-octaves. For a microphone at the eardrum inside; one in the cup lies before the ear canal and needs another.
 *
 * @source iso-11904-1 diffuse-field response of the open ear
 */
export const OPEN_EAR_DB: OctaveBandValues = [0, 0.2, 0.8, 2.2, 4.4, 12.4, 13.6, 8.7];

/** Bands without which no personal attenuation is stated: 63 Hz and 8 kHz may be left out. */
const NEEDED_HZ = [125, 250, 500, 1000, 2000, 4000] as const;

/** Noise reduction of a band with the active part off: only where the band says something by itself. */
export function reduced(band: MeasuredBand): ReducedBand {
  const { outsideDb, insideDb, reason } = band;
  const says = reason === null && outsideDb !== null && insideDb !== null;
  return { ...band, noiseReductionDb: says ? outsideDb - insideDb : null };
}

/**
 * The same with the active part on. A canceller takes away what both microphones have in common and so lowers their
 * coherence: a band counts where the active part off had coherence, and only has to be heard now.
 */
export function reducedActive(band: MeasuredBand, off: MeasuredBand): ReducedBand {
  const isLowered = band.reason === "low-coherence" && off.reason === null;
  const reason: BandReason | null = isLowered ? null : band.reason;
  return reduced({ ...band, reason: off.reason === null ? reason : (reason ?? off.reason) });
}

const byBand = (value: (band: number) => number | null): BandsOrNull =>
  OCTAVE_BANDS_HZ.map((_, band) => value(band));

const difference = (from: number | null | undefined, less: number | null | undefined) =>
  from == null || less == null ? null : from - less;

/**
 * Attenuation of one ear by octave band, dB: the noise reduction with the correction to the open ear added; and of the
 * active part the difference of two noise reductions, each against its own outside microphone and from auto-spectra, so
 * that neither sensitivity, correction nor a change of the noise counts.
 */
export function earAttenuation(
  off: readonly ReducedBand[],
  on: readonly ReducedBand[] | null,
  correctionDb: BandsOrNull,
): EarAttenuation {
  const noiseReductionDb = byBand((band) => off[band]?.noiseReductionDb ?? null);
  return {
    noiseReductionDb,
    attenuationDb: byBand((band) => {
      const own = noiseReductionDb[band] ?? null;
      const correction = correctionDb[band] ?? null;
      return own === null || correction === null ? null : own + correction;
    }),
    activeDb:
      on && byBand((band) => difference(on[band]?.noiseReductionDb, noiseReductionDb[band])),
  };
}

/**
 * Personal attenuation rating, dB: by how much the attenuation lowers the A-weighted level of a noise, that of the
 * reference (pink, equal in every octave) or of the worker's own task. Bands that say nothing are left out of both
 * levels; null where one of `NEEDED_HZ` is among them.
 *
 * @source iso-4869-2 6
 */
export function personalAttenuationDb(
  attenuationDb: BandsOrNull,
  spectrumDb: OctaveBandValues | null,
): number | null {
  let outside = 0;
  let inside = 0;
  for (const [band, hz] of OCTAVE_BANDS_HZ.entries()) {
    const lossDb = attenuationDb[band] ?? null;
    const levelDb = spectrumDb ? (spectrumDb[band] ?? null) : 0;
    if (lossDb === null || levelDb === null) {
      if (NEEDED_HZ.some((needed) => needed === hz)) return null;
      continue;
    }
    const weightedDb = levelDb + A_WEIGHTING_DB[band]!;
    outside += 10 ** (weightedDb / 10);
    inside += 10 ** ((weightedDb - lossDb) / 10);
  }
  return 10 * Math.log10(outside / inside);
}

/** How far an active part may stay behind its test report on a worker, dB. Common practice, no source. */
const ACTIVE_TOLERANCE_DB = 3;
/** From here on a band's stated attenuation is something to be checked, dB. Common practice, no source. */
const WORTH_CHECKING_DB = 3;

export interface ActiveCheck {
  /** Null: a band that matters said nothing. */
  readonly hasPassed: boolean | null;
  /** What is stated less what was found, dB. */
  readonly shortfallDb: BandsOrNull;
  readonly toleranceDb: number;
}

/**
 * Whether the active part does on a worker what its model states: in no band that was heard is it behind by more than the
 * tolerance, neither with too little attenuation nor with more noise added than stated. Fails on any such band; passes
 * only where every band with an attenuation worth checking was heard. Null where the model states none.
 */
export function checkActivePart(
  statedDb: OctaveBandValues | null,
  foundDb: BandsOrNull,
): ActiveCheck | null {
  if (statedDb === null) return null;
  const shortfallDb = byBand((band) => difference(statedDb[band], foundDb[band]));
  const toleranceDb = ACTIVE_TOLERANCE_DB;
  const isBehind = shortfallDb.some((db) => db !== null && db > toleranceDb);
  const matters = statedDb.flatMap((db, band) =>
    db !== null && db >= WORTH_CHECKING_DB ? [band] : [],
  );
  const isHeard = matters.length > 0 && matters.every((band) => shortfallDb[band] !== null);
  return { hasPassed: isBehind ? false : isHeard ? true : null, shortfallDb, toleranceDb };
}

/** Inside louder than outside in every band that was heard, three of them at least: the channels are the other way round. */
export function looksSwapped(bands: readonly MeasuredBand[]): boolean {
  const heard = bands.flatMap(({ outsideDb, insideDb, reason }) =>
    reason === "too-little-noise" || outsideDb === null || insideDb === null
      ? []
      : [outsideDb - insideDb],
  );
  return heard.length >= 3 && heard.every((db) => db < 0);
}

/** The same measurement with the channels the other way round. */
export const swapped = <B extends MeasuredBand>(band: B): B => ({
  ...band,
  outsideDb: band.insideDb,
  insideDb: band.outsideDb,
});

export type CalibrationKind = "sensitivity" | "tone" | "alike" | "typed";
export type CorrectionKind = "none" | "open-ear" | "own";

/** Standard uncertainties, dB, of what both microphones' levels rest on. Common practice, no source. */
const CALIBRATION_SD_DB: Record<CalibrationKind, number> = {
  tone: 0.4,
  sensitivity: 0.7,
  alike: 1,
  typed: 1,
};
/** Of what lies between noise reduction and attenuation. Common practice, no source. */
const CORRECTION_SD_DB: Record<CorrectionKind, number> = { own: 1, "open-ear": 2, none: 3 };

/**
 * Standard uncertainty of a personal attenuation by two microphones, dB: of the levels, and of the way from the inside
 * microphone to the open ear. How the next donning differs is for further trials to say.
 */
export function methodSdDb(calibration: CalibrationKind, correction: CorrectionKind): number {
  return Math.hypot(CALIBRATION_SD_DB[calibration], CORRECTION_SD_DB[correction]);
}
