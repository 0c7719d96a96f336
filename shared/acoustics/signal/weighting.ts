import { leastSquares } from "./least-squares";
import { halfAngleSquare, minimumPhase, powerResponse, type Section } from "./sections";

/** Pole frequencies of the weightings in Hz, from the constants that the standard derives them from. @source iec-61672-1 5.4.6 and Annex E */
const F_LOW_HZ = 20.598997;
const F_A2_HZ = 107.65265;
const F_A3_HZ = 737.86223;
const F_HIGH_HZ = 12194.217;
const REFERENCE_HZ = 1000;
/** As far as the response is held to the analytic one; what lies above is far down and unheard. */
const FITTED_TO_HZ = 21_000;

/**
 * C-weighting by the analytic form, dB relative to 1 kHz.
 *
 * @source iec-61672-1 Annex E, formula E.1
 */
export function cWeightingDb(frequencyHz: number): number {
  return 10 * Math.log10(analyticC(frequencyHz) / analyticC(REFERENCE_HZ));
}

/**
 * A-weighting by the analytic form, dB relative to 1 kHz.
 *
 * @source iec-61672-1 Annex E, formula E.6
 */
export function aWeightingDb(frequencyHz: number): number {
  return (
    cWeightingDb(frequencyHz) +
    10 * Math.log10(analyticAOverC(frequencyHz) / analyticAOverC(REFERENCE_HZ))
  );
}

const highPass = (frequencyHz: number, poleHz: number) =>
  frequencyHz ** 2 / (frequencyHz ** 2 + poleHz ** 2);
const lowPass = (frequencyHz: number) => 1 / (1 + (frequencyHz / F_HIGH_HZ) ** 2);
const analyticC = (frequencyHz: number) =>
  highPass(frequencyHz, F_LOW_HZ) ** 2 * lowPass(frequencyHz) ** 2;
const analyticAOverC = (frequencyHz: number) =>
  highPass(frequencyHz, F_A2_HZ) * highPass(frequencyHz, F_A3_HZ);

export interface WeightingFilters {
  /** C-weighting, 0 dB at 1 kHz: the low poles, then the high one, twice. */
  readonly c: readonly [low: Section, high: Section, highAgain: Section];
  /** What turns the C-weighted signal into the A-weighted one: A has C's poles and two more. */
  readonly aAfterC: Section;
}

/**
 * Digital weightings for a sampling rate. The low poles are mapped bilinearly, each at its own frequency. The double
 * pole at 12.2 kHz would be wrong by several decibels that way at 44.1 kHz: its power response is fitted instead, as a
 * ratio of polynomials in sin²(ω/2), which leaves less than 0.04 dB up to 20 kHz at every rate from 44.1 kHz.
 *
 * @source iec-61672-1 5.4
 */
export function designWeightings(rateHz: number): WeightingFilters {
  const low = twoHighPasses(F_LOW_HZ, F_LOW_HZ, rateHz);
  const high = fitHighPole(rateHz);
  const aAfterC = twoHighPasses(F_A2_HZ, F_A3_HZ, rateHz);
  return {
    c: [scaled(low, powerResponse([low, high, high], REFERENCE_HZ, rateHz) ** -0.5), high, high],
    aAfterC: scaled(aAfterC, powerResponse([aAfterC], REFERENCE_HZ, rateHz) ** -0.5),
  };
}

const scaled = (section: Section, gain: number): Section => ({
  ...section,
  b0: section.b0 * gain,
  b1: section.b1 * gain,
  b2: section.b2 * gain,
});

function twoHighPasses(firstHz: number, secondHz: number, rateHz: number): Section {
  const pole = (poleHz: number) => {
    const warped = Math.tan((Math.PI * poleHz) / rateHz);
    return { zeroGain: 1 / (1 + warped), pole: (1 - warped) / (1 + warped) };
  };
  const first = pole(firstHz);
  const second = pole(secondHz);
  const gain = first.zeroGain * second.zeroGain;
  return {
    b0: gain,
    b1: -2 * gain,
    b2: gain,
    a1: -(first.pole + second.pole),
    a2: first.pole * second.pole,
  };
}

/** Fits numerator and denominator together: each round weighs the linear fit by the last round's denominator. */
function fitHighPole(rateHz: number): Section {
  const points = 400;
  const frequenciesHz = Float64Array.from(
    { length: points },
    (_, at) => (FITTED_TO_HZ * (at + 1)) / points,
  );
  const q = frequenciesHz.map((frequencyHz) => halfAngleSquare(frequencyHz, rateHz));
  const target = frequenciesHz.map(lowPass);
  const ones = new Float64Array(points).fill(1);
  let denominator = ones;
  let found: readonly number[] = [];
  for (let round = 0; round < 20; round++) {
    const weight = (at: number) => 1 / (denominator[at]! * target[at]!);
    const numerators = [0, 1, 2].map((power) => q.map((value, at) => value ** power * weight(at)));
    const denominators = [1, 2].map((power) =>
      q.map((value, at) => -(value ** power) * target[at]! * weight(at)),
    );
    found = leastSquares(
      [...numerators, ...denominators],
      target.map((value, at) => value * weight(at)),
    );
    denominator = q.map((value) => 1 + found[3]! * value + found[4]! * value * value);
  }
  const [p0 = 0, p1 = 0, p2 = 0, d1 = 0, d2 = 0] = found;
  const [b0, b1, b2] = minimumPhase(p0, p1, p2);
  const [a0, a1, a2] = minimumPhase(1, d1, d2);
  return { b0: b0 / a0, b1: b1 / a0, b2: b2 / a0, a1: a1 / a0, a2: a2 / a0 };
}
