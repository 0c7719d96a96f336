import { type BandAttenuation, OCTAVE_BANDS_HZ, type OctaveBandValues } from "../types";

/** Frequency weightings at the octave mid frequencies, dB. @source iec-61672-1 Table 3 */
export const A_WEIGHTING_DB: OctaveBandValues = [-26.2, -16.1, -8.6, -3.2, 0, 1.2, 1.0, -1.1];
export const C_WEIGHTING_DB: OctaveBandValues = [-0.8, -0.2, 0, 0, 0, -0.2, -0.8, -3.0];

/** Attenuation assumed by band, dB: mean − α·standard deviation. @source iso-4869-2 4 */
export function assumedAttenuationDb(bands: BandAttenuation, alpha: number): OctaveBandValues {
  return mapBands((band) => {
    const meanDb = bands.meanDb[band] ?? null;
    const sdDb = bands.sdDb[band] ?? null;
    return meanDb === null || sdDb === null ? null : meanDb - alpha * sdDb;
  });
}

/**
 * A-weighted level of a spectrum behind an attenuation, dB: 10 lg Σ 10^((Lf + Af − APVf)/10). The sum starts at 125 Hz
 * where the 63 Hz band of either is not known, as the standard allows.
 *
 * @source iso-4869-2 6
 */
export function levelBehindBandsDb(
  spectrumDb: OctaveBandValues,
  attenuationDb: OctaveBandValues,
): number {
  let sum = 0;
  for (let band = 0; band < OCTAVE_BANDS_HZ.length; band++) {
    const levelDb = spectrumDb[band];
    const lossDb = attenuationDb[band];
    if (levelDb == null || lossDb == null) continue;
    sum += 10 ** ((levelDb + A_WEIGHTING_DB[band]! - lossDb) / 10);
  }
  return 10 * Math.log10(sum);
}

/** Overall level of a spectrum under a weighting, dB. @source iec-61672-1 3 */
export function weightedSumDb(
  spectrumDb: OctaveBandValues,
  weightingDb: OctaveBandValues,
  from: OctaveBandValues = spectrumDb,
): number {
  let sum = 0;
  for (let band = 0; band < OCTAVE_BANDS_HZ.length; band++) {
    const levelDb = spectrumDb[band];
    if (levelDb == null || from[band] == null) continue;
    sum += 10 ** ((levelDb + weightingDb[band]!) / 10);
  }
  return 10 * Math.log10(sum);
}

/** A spectrum raised or lowered as a whole so that its A-weighted sum is `levelDb`, dB. */
export function shiftedSpectrumDb(spectrumDb: OctaveBandValues, levelDb: number): OctaveBandValues {
  const byDb = levelDb - weightedSumDb(spectrumDb, A_WEIGHTING_DB);
  return mapBands((band) => {
    const bandDb = spectrumDb[band] ?? null;
    return bandDb === null ? null : bandDb + byDb;
  });
}

/** LC − LA of a spectrum, dB. */
export function lcMinusLaOfSpectrumDb(spectrumDb: OctaveBandValues): number {
  return weightedSumDb(spectrumDb, C_WEIGHTING_DB) - weightedSumDb(spectrumDb, A_WEIGHTING_DB);
}

/**
 * By how much a band-wise attenuation lowers the A-weighted level of a spectrum, dB. Taken over the bands that both
 * have, so that a band unknown to one of them is neither credited nor held against it.
 *
 * @source iso-4869-2 6
 */
export function bandReductionDb(
  spectrumDb: OctaveBandValues,
  attenuationDb: OctaveBandValues,
): number {
  return (
    weightedSumDb(spectrumDb, A_WEIGHTING_DB, attenuationDb) -
    levelBehindBandsDb(spectrumDb, attenuationDb)
  );
}

/** A-weighted octave-band levels of the eight reference noises, each 100 dB(A) in all. @source iso-4869-2 Table 2 */
const REFERENCE_NOISES_A_DB: readonly OctaveBandValues[] = [
  [51.4, 62.6, 70.8, 81.0, 90.4, 96.2, 94.7, 92.3],
  [59.5, 68.9, 78.3, 84.3, 92.8, 96.3, 94.0, 90.0],
  [59.8, 71.1, 80.8, 88.0, 95.0, 94.4, 94.1, 89.0],
  [65.4, 77.2, 84.5, 89.8, 95.5, 94.3, 92.5, 88.8],
  [65.3, 77.4, 86.5, 92.5, 96.4, 93.0, 90.4, 83.7],
  [70.7, 82.0, 89.3, 93.3, 95.6, 93.0, 90.1, 83.0],
  [75.6, 84.2, 90.1, 93.6, 96.2, 91.3, 87.9, 81.9],
  [77.6, 88.0, 93.4, 93.8, 94.2, 91.4, 87.9, 79.9],
];
const REFERENCE_COEFFICIENTS = [-1.2, -0.49, 0.14, 1.56, -2.98, -1.01, 0.85, 3.14] as const;
/** Pink noise, A-weighted by band, 100 dB(C) in all. @source iso-4869-2 Table 4 */
const PINK_NOISE_A_DB: OctaveBandValues = [65.3, 75.4, 82.9, 88.3, 91.5, 92.7, 92.5, 90.4];

/**
 * H, M and L of a band-wise attenuation, dB, not rounded to the whole numbers of a label.
 *
 * @source iso-4869-2 7
 */
export function hmlOfBandsDb(attenuationDb: OctaveBandValues): {
  readonly hDb: number;
  readonly mDb: number;
  readonly lDb: number;
} {
  let h = 0;
  let m = 0;
  let l = 0;
  for (const [index, noiseDb] of REFERENCE_NOISES_A_DB.entries()) {
    const reductionDb = 100 - levelBehindWeightedDb(noiseDb, attenuationDb);
    const coefficient = REFERENCE_COEFFICIENTS[index]!;
    if (index < 4) h += (0.25 - 0.48 * coefficient) * reductionDb;
    else {
      m += (0.25 - 0.16 * coefficient) * reductionDb;
      l += (0.25 + 0.23 * coefficient) * reductionDb;
    }
  }
  return { hDb: h, mDb: m, lDb: l };
}

/**
 * SNR of a band-wise attenuation, dB, not rounded.
 *
 * @source iso-4869-2 8
 */
export function snrOfBandsDb(attenuationDb: OctaveBandValues): number {
  return 100 - levelBehindWeightedDb(PINK_NOISE_A_DB, attenuationDb);
}

function levelBehindWeightedDb(
  weightedDb: OctaveBandValues,
  attenuationDb: OctaveBandValues,
): number {
  let sum = 0;
  for (let band = 0; band < OCTAVE_BANDS_HZ.length; band++) {
    const lossDb = attenuationDb[band];
    if (lossDb != null) sum += 10 ** ((weightedDb[band]! - lossDb) / 10);
  }
  return 10 * Math.log10(sum);
}

/** One value per band; only the first may be null. */
export function mapBands(bandValue: (band: number) => number | null): OctaveBandValues {
  const values = OCTAVE_BANDS_HZ.map((_, band) => bandValue(band));
  for (const [band, value] of values.entries()) {
    if (band > 0 && value === null)
      throw new RangeError(`No value for ${OCTAVE_BANDS_HZ[band]} Hz`);
  }
  return values as unknown as OctaveBandValues;
}
