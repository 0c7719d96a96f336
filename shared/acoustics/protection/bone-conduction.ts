import type { BandAttenuation, OctaveBandValues } from "../types";
import { assumedAttenuationDb, bandReductionDb, mapBands } from "./octave-band";

/**
 * The most that anything over or in the ears can take off, by octave band, dB: sound then reaches the inner ear through
 * the skull. None is stated at 63 Hz. Means over subjects, from memory, to some 3 dB.
 *
 * @source berger-2003 bone-conduction limits, head uncovered
 */
export const BONE_CONDUCTION_LIMIT_DB: OctaveBandValues = [null, 47, 51, 59, 49, 40, 47, 50];

/**
 * Attenuation of two protectors worn together that may be counted by band, dB: mean − α·standard deviation, and no more
 * than what the skull lets through.
 *
 * @source iso-4869-2 4
 * @source berger-2003 bone-conduction limits, head uncovered
 */
export function combinationAttenuationDb(bands: BandAttenuation, alpha: number): OctaveBandValues {
  const assumedDb = assumedAttenuationDb(bands, alpha);
  return mapBands((band) => {
    const bandDb = assumedDb[band] ?? null;
    const limitDb = BONE_CONDUCTION_LIMIT_DB[band] ?? null;
    return bandDb === null || limitDb === null ? bandDb : Math.min(bandDb, limitDb);
  });
}

/** Equal level in every octave. */
const PINK_DB: OctaveBandValues = [null, 90, 90, 90, 90, 90, 90, 90];

/**
 * The greatest attenuation of the A-weighted level that an ear can have by the skull, dB, in a noise (unweighted octave
 * bands; pink unless given). A personal attenuation above it was not measured but mistaken.
 *
 * @source berger-2003 bone-conduction limits, head uncovered
 */
export function boneConductionLimitDb(spectrumDb: OctaveBandValues = PINK_DB): number {
  return bandReductionDb(spectrumDb, BONE_CONDUCTION_LIMIT_DB);
}
