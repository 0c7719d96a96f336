import logGamma from "@stdlib/math-base-special-gammaln";
import fCdf from "@stdlib/stats-base-dists-f-cdf";
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";
import normalQuantileOf from "@stdlib/stats-base-dists-normal-quantile";
import studentQuantileOf from "@stdlib/stats-base-dists-t-quantile";

/** The distributions that the statistics of groups need, under the names that they use. */

const SQRT_2_PI = Math.sqrt(2 * Math.PI);

export const normalDensity = (x: number): number => Math.exp((-x * x) / 2) / SQRT_2_PI;

/** P(X ≤ x) of the standard normal distribution. */
export const normalShare = (x: number): number => normalCdf(x, 0, 1);

/**
 * The x with P(X ≤ x) = share.
 *
 * @throws RangeError for a share that is not between 0 and 1.
 */
export function normalQuantile(share: number): number {
  if (!(share > 0 && share < 1)) throw new RangeError("A share lies between 0 and 1");
  return normalQuantileOf(share, 0, 1);
}

/**
 * The t with P(T ≤ t) = share.
 *
 * @throws RangeError for a share that is not between 0 and 1.
 */
export function studentQuantile(share: number, degrees: number): number {
  if (!(share > 0 && share < 1)) throw new RangeError("A share lies between 0 and 1");
  return studentQuantileOf(share, degrees);
}

/** P(F > f), the tail of the F distribution: the reciprocal's lower share, which keeps its digits. */
export const fTail = (f: number, degreesAbove: number, degreesBelow: number): number =>
  f <= 0 ? 1 : fCdf(1 / f, degreesBelow, degreesAbove);

export { logGamma };
