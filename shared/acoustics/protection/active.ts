import { type ActivePart, OCTAVE_BANDS_HZ, type OctaveBandValues } from "../types";
import { mapBands } from "./octave-band";

/**
 * Attenuation of a canceller that adds the opposite wave with a gain and a phase error, dB; negative where it adds
 * noise: −10 lg(1 + g² − 2g·cos φ). Infinity for the perfect one.
 *
 * @source elliott-2001 two-wave cancellation
 */
export function cancellationDb(gain: number, phaseRad: number): number {
  return -10 * Math.log10(residualPower(gain, phaseRad));
}

/** Power left of a unit wave, |1 − g·e^(−jφ)|². Written so that small phases lose no digits. */
function residualPower(gain: number, phaseRad: number): number {
  return (1 - gain) ** 2 + 4 * gain * Math.sin(phaseRad / 2) ** 2;
}

/**
 * Phase at which a canceller of this gain breaks even, radians: cos φ = g/2. Null at a gain of 2 or more, which only
 * adds.
 *
 * @source elliott-2001 two-wave cancellation
 */
export function breakEvenPhaseRad(gain: number): number | null {
  return gain < 2 ? Math.acos(gain / 2) : null;
}

/**
 * First frequency at which a delayed canceller breaks even, Hz. Null where it never does, as at a gain of 0, which
 * neither takes off nor adds.
 *
 * @source elliott-2001 two-wave cancellation
 */
export function breakEvenHz(delayS: number, gain: number): number | null {
  const phaseRad = breakEvenPhaseRad(gain);
  if (phaseRad === null) return 0;
  return delayS === 0 || gain === 0 ? null : phaseRad / (2 * Math.PI * delayS);
}

/** Base-ten octave ratio G, and its half for the band edges. @source iec-61260-1 5.2 */
const HALF_OCTAVE = 10 ** 0.15;

/** Exact mid frequency of an octave band, Hz. @source iec-61260-1 5.4 */
export function exactMidHz(band: number): number {
  return 1000 * 10 ** (0.3 * (band - OCTAVE_BANDS_HZ.indexOf(1000)));
}

/**
 * Attenuation of a delayed canceller over an octave band, dB: its residual power averaged over the band's frequencies
 * (equal power per hertz), in closed form.
 *
 * @source elliott-2001 two-wave cancellation
 * @source iec-61260-1 5.5
 */
export function bandCancellationDb(band: number, delayS: number, gain: number): number {
  const midHz = exactMidHz(band);
  return averageCancellationDb(midHz / HALF_OCTAVE, midHz * HALF_OCTAVE, delayS, gain);
}

function averageCancellationDb(fromHz: number, toHz: number, delayS: number, gain: number): number {
  return -10 * Math.log10(averageResidual(fromHz, toHz, delayS, gain));
}

function averageResidual(fromHz: number, toHz: number, delayS: number, gain: number): number {
  if (delayS === 0) return (1 - gain) ** 2;
  const turn = 2 * Math.PI * delayS;
  const meanCos = (Math.sin(turn * toHz) - Math.sin(turn * fromHz)) / (turn * (toHz - fromHz));
  return 1 + gain * gain - 2 * gain * meanCos;
}

/**
 * Power left of a band where nothing that is taken away counts, only what is added: the mean of the larger of 1 and the
 * residual, in closed form. Noise is added where cos φ < g/2, from the break-even on once in every turn of the phase.
 *
 * @source elliott-2001 two-wave cancellation
 */
function averageWithAdded(fromHz: number, toHz: number, delayS: number, gain: number): number {
  if (delayS === 0) return Math.max(1, (1 - gain) ** 2);
  const turn = 2 * Math.PI * delayS;
  const [from, to] = [turn * fromHz, turn * toHz];
  const evenRad = breakEvenPhaseRad(gain) ?? 0;
  let added = 0;
  for (
    let start = 2 * Math.PI * Math.floor(from / (2 * Math.PI));
    start < to;
    start += 2 * Math.PI
  ) {
    const a = Math.max(from, start + evenRad);
    const b = Math.min(to, start + 2 * Math.PI - evenRad);
    if (b > a) added += gain * gain * (b - a) - 2 * gain * (Math.sin(b) - Math.sin(a));
  }
  return 1 + added / (to - from);
}

/**
 * Active attenuation of a device by octave band, dB; null where it states neither bands nor a delay and a gain.
 *
 * From the test report where there is one, else from delay and gain over each band. No credit past the first
 * break-even (the formula repeats at whole periods, a device does not) or above the bandwidth, none beyond the stated
 * maximum; above that only the noise it adds counts, frequency by frequency.
 *
 * @source elliott-2001 two-wave cancellation
 */
export function activeAttenuationDb(active: ActivePart): OctaveBandValues | null {
  const { attenuationDb, delayS, gain, bandwidthHz } = active;
  const maximumDb = active.maximumDb ?? Number.POSITIVE_INFINITY;
  if (attenuationDb !== null) {
    return mapBands((band) => {
      const bandDb = attenuationDb[band] ?? null;
      if (bandDb === null) return null;
      const isInBandwidth = bandwidthHz === null || OCTAVE_BANDS_HZ[band]! <= bandwidthHz;
      return Math.min(bandDb, isInBandwidth ? maximumDb : 0);
    });
  }
  if (delayS === null || gain === null) return null;
  const creditEndsHz = Math.min(
    bandwidthHz ?? Number.POSITIVE_INFINITY,
    breakEvenHz(delayS, gain) ?? Number.POSITIVE_INFINITY,
  );
  return mapBands((band) => creditedBandDb(band, delayS, gain, creditEndsHz, maximumDb));
}

/** A band's attenuation with the credit ending inside it where it must. */
function creditedBandDb(
  band: number,
  delayS: number,
  gain: number,
  creditEndsHz: number,
  maximumDb: number,
): number {
  const midHz = exactMidHz(band);
  const fromHz = midHz / HALF_OCTAVE;
  const toHz = midHz * HALF_OCTAVE;
  if (toHz <= creditEndsHz) {
    return Math.min(maximumDb, averageCancellationDb(fromHz, toHz, delayS, gain));
  }
  if (fromHz >= creditEndsHz) {
    return -10 * Math.log10(averageWithAdded(fromHz, toHz, delayS, gain));
  }
  const least = 10 ** (-maximumDb / 10);
  const credited = Math.max(least, averageResidual(fromHz, creditEndsHz, delayS, gain));
  const beyond = averageWithAdded(creditEndsHz, toHz, delayS, gain);
  const share = (creditEndsHz - fromHz) / (toHz - fromHz);
  return -10 * Math.log10(share * credited + (1 - share) * beyond);
}

/**
 * Share of the worn time for which the battery lasts, 0 to 1; null where the battery is not stated.
 */
export function poweredShare(batteryMin: number | null, wornMin: number): number | null {
  if (batteryMin === null) return null;
  return wornMin <= batteryMin ? 1 : batteryMin / wornMin;
}
