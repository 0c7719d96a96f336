/** A second-order section: (b0 + b1·z⁻¹ + b2·z⁻²) / (1 + a1·z⁻¹ + a2·z⁻²). */
export interface Section {
  readonly b0: number;
  readonly b1: number;
  readonly b2: number;
  readonly a1: number;
  readonly a2: number;
}

/** Power response of sections in a row at a frequency, as a ratio. */
export function powerResponse(
  sections: readonly Section[],
  frequencyHz: number,
  rateHz: number,
): number {
  let power = 1;
  for (const { b0, b1, b2, a1, a2 } of sections)
    power *= powerOf(b0, b1, b2, frequencyHz, rateHz) / powerOf(1, a1, a2, frequencyHz, rateHz);
  return power;
}

/** |c0 + c1·z⁻¹ + c2·z⁻²|² on the unit circle. Written in sin²(ω/2), which keeps its digits at low frequencies. */
export function powerOf(
  c0: number,
  c1: number,
  c2: number,
  frequencyHz: number,
  rateHz: number,
): number {
  const q = halfAngleSquare(frequencyHz, rateHz);
  return (c0 + c1 + c2) ** 2 - 4 * (c1 * (c0 + c2) + 4 * c0 * c2) * q + 16 * c0 * c2 * q * q;
}

/** sin²(ω/2): the variable in which power responses are fitted. */
export const halfAngleSquare = (frequencyHz: number, rateHz: number) =>
  Math.sin((Math.PI * frequencyHz) / rateHz) ** 2;

/**
 * The polynomial c0 + c1·z⁻¹ + c2·z⁻² with its zeros inside the unit circle whose power response is
 * p0 + p1·q + p2·q², q = sin²(ω/2).
 *
 * @throws RangeError when that power is not positive at every frequency.
 */
export function minimumPhase(
  p0: number,
  p1: number,
  p2: number,
): readonly [number, number, number] {
  const atNyquist = p0 + p1 + p2;
  const sum = (Math.sqrt(p0) + Math.sqrt(atNyquist)) / 2;
  const difference = Math.sqrt(sum * sum - p2 / 4);
  const result = [
    (sum + difference) / 2,
    (Math.sqrt(p0) - Math.sqrt(atNyquist)) / 2,
    (sum - difference) / 2,
  ] as const;
  if (result.some(Number.isNaN)) throw new RangeError("a power response must be positive");
  return result;
}

/** States that have decayed below anything audible are set to zero: denormal numbers are a hundred times slower. */
export function flushDecayed(states: Float64Array): void {
  for (let index = 0; index < states.length; index++)
    if (Math.abs(states[index]!) < 1e-40) states[index] = 0;
}
