import { type ActivePart, type BandAttenuation, OCTAVE_BANDS_HZ, type TaskLevel } from "../types";
import { activeAttenuationDb, breakEvenHz, cancellationDb } from "./active";
import {
  A_WEIGHTING_DB,
  assumedAttenuationDb,
  levelBehindBandsDb,
  mapBands,
  weightedSumDb,
} from "./octave-band";

export interface ActiveChartBand {
  readonly frequencyHz: number;
  /** Unweighted, dB: the noise outside, under the passive part, and with the active part. */
  readonly outsideDb: number;
  readonly passiveDb: number;
  readonly activeDb: number;
  /** The same, A-weighted. */
  readonly outsideADb: number;
  readonly passiveADb: number;
  readonly activeADb: number;
  /** What the active part takes off in the band, dB; negative where it adds noise. */
  readonly gainDb: number;
  readonly addsNoise: boolean;
}

export interface ActiveChart {
  readonly bands: readonly ActiveChartBand[];
  /** Sums over the bands shown, dB(A). */
  readonly outsideDb: number;
  readonly passiveDb: number;
  readonly activeDb: number;
  readonly isSaturated: boolean;
}

/**
 * An active protector in a noise, band by band: outside, under the passive part (mean − α·deviation) and with the active
 * part on. Null where the noise has no spectrum or the device states no active part.
 *
 * @source iso-4869-2 6
 * @source elliott-2001 two-wave cancellation
 */
export function activeChart(
  level: TaskLevel,
  bands: BandAttenuation,
  active: ActivePart,
  alpha = 1,
): ActiveChart | null {
  const spectrumDb = level.octaveBandsDb;
  const statedDb = activeAttenuationDb(active);
  if (spectrumDb === null || statedDb === null) return null;
  const isSaturated = active.saturatesAboveDb !== null && level.levelDb > active.saturatesAboveDb;
  const lossDb = assumedAttenuationDb(bands, alpha);
  const bothDb = mapBands((band) => {
    const bandDb = lossDb[band] ?? null;
    return bandDb === null ? null : bandDb + (isSaturated ? 0 : (statedDb[band] ?? 0));
  });
  const rows = OCTAVE_BANDS_HZ.flatMap((frequencyHz, band): ActiveChartBand[] => {
    const outsideDb = spectrumDb[band];
    const passiveLossDb = lossDb[band];
    const bothLossDb = bothDb[band];
    if (outsideDb == null || passiveLossDb == null || bothLossDb == null) return [];
    const weightingDb = A_WEIGHTING_DB[band]!;
    const gainDb = isSaturated ? 0 : (statedDb[band] ?? 0);
    const passiveDb = outsideDb - passiveLossDb;
    const activeDb = outsideDb - bothLossDb;
    return [
      {
        frequencyHz,
        outsideDb,
        passiveDb,
        activeDb,
        outsideADb: outsideDb + weightingDb,
        passiveADb: passiveDb + weightingDb,
        activeADb: activeDb + weightingDb,
        gainDb,
        addsNoise: gainDb < 0,
      },
    ];
  });
  return {
    bands: rows,
    outsideDb: weightedSumDb(spectrumDb, A_WEIGHTING_DB, lossDb),
    passiveDb: levelBehindBandsDb(spectrumDb, lossDb),
    activeDb: levelBehindBandsDb(spectrumDb, bothDb),
    isSaturated,
  };
}

export interface DelayGainCurve {
  /** Attenuation of the wave at each frequency, dB; negative where it adds noise. Infinity: nothing is left. */
  readonly points: readonly { readonly frequencyHz: number; readonly attenuationDb: number }[];
  /** The same as a device is credited with it, by octave band, dB. */
  readonly bands: readonly { readonly frequencyHz: number; readonly attenuationDb: number }[];
  /** First frequency at which it takes nothing off, Hz; null: none. */
  readonly breakEvenHz: number | null;
}

/** Frequencies of the curve: about 24 to the octave from 50 Hz to 8 kHz. */
const CURVE_FROM_HZ = 50;
const CURVE_TO_HZ = 8000;
const POINTS_PER_OCTAVE = 24;

/**
 * What a canceller's delay (s) and gain (1: exact) leave of its attenuation over frequency: the bare formula, which
 * repeats at whole periods, and beside it what a device is credited with.
 *
 * @source elliott-2001 two-wave cancellation
 */
export function delayGainCurve(
  delayS: number,
  gain: number,
  limits: Pick<ActivePart, "maximumDb" | "bandwidthHz"> = { maximumDb: null, bandwidthHz: null },
): DelayGainCurve {
  const count = Math.round(POINTS_PER_OCTAVE * Math.log2(CURVE_TO_HZ / CURVE_FROM_HZ));
  const points = Array.from({ length: count + 1 }, (_, index) => {
    const frequencyHz = CURVE_FROM_HZ * (CURVE_TO_HZ / CURVE_FROM_HZ) ** (index / count);
    return { frequencyHz, attenuationDb: cancellationDb(gain, 2 * Math.PI * frequencyHz * delayS) };
  });
  const creditedDb = activeAttenuationDb({
    attenuationDb: null,
    delayS,
    gain,
    ...limits,
    saturatesAboveDb: null,
    batteryMin: null,
  });
  return {
    points,
    bands: OCTAVE_BANDS_HZ.map((frequencyHz, band) => ({
      frequencyHz,
      attenuationDb: creditedDb?.[band] ?? 0,
    })),
    breakEvenHz: breakEvenHz(delayS, gain),
  };
}
