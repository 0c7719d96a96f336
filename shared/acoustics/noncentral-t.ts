import { logGamma, normalQuantile, normalShare } from "./distributions";

/**
 * P(T ≤ t) of the non-central t distribution: T = (Z + δ)/S with S² a χ² of ν degrees over ν, so that the share is the
 * mean of Φ(t·S − δ) over S. Integrated by Simpson's rule over where S has its weight; to better than 1e-9 for t·√ν and
 * δ of tolerance limits.
 *
 * @throws RangeError below one degree of freedom.
 * @source johnson-welch-1940
 */
export function noncentralTShare(t: number, degrees: number, noncentrality: number): number {
  if (!(degrees >= 1)) throw new RangeError("Student's t has at least one degree of freedom");
  // ln of the density of S: 2·(ν/2)^(ν/2)/Γ(ν/2) · s^(ν−1) · e^(−νs²/2).
  const logFactor = Math.LN2 + (degrees / 2) * Math.log(degrees / 2) - logGamma(degrees / 2);
  const spread = 10 / Math.sqrt(2 * degrees);
  const from = Math.max(0, 1 - spread);
  const to = 1 + spread;
  const value = (s: number): number => {
    if (s === 0) return degrees === 1 ? Math.exp(logFactor) * normalShare(-noncentrality) : 0;
    const logDensity = logFactor + (degrees - 1) * Math.log(s) - (degrees * s * s) / 2;
    return Math.exp(logDensity) * normalShare(t * s - noncentrality);
  };
  const steps = degrees < 3 ? 8000 : 2000;
  const width = (to - from) / steps;
  let sum = value(from) + value(to);
  for (let step = 1; step < steps; step++)
    sum += value(from + step * width) * (step % 2 === 1 ? 4 : 2);
  return Math.min(1, (sum * width) / 3);
}

/**
 * The t with P(T ≤ t) = share.
 *
 * @throws RangeError for a share that is not between 0 and 1.
 * @source johnson-welch-1940
 */
export function noncentralTQuantile(share: number, degrees: number, noncentrality: number): number {
  if (!(share > 0 && share < 1)) throw new RangeError("A share lies between 0 and 1");
  const excess = (t: number) => noncentralTShare(t, degrees, noncentrality) - share;
  let reach = Math.abs(noncentrality) + 2;
  while (excess(reach) < 0 || excess(-reach) > 0) reach *= 2;
  return solveSmooth(excess, -reach, reach);
}

/**
 * Factor K of the one-sided upper tolerance limit, mean + K·sd: with the given confidence at least the given share of a
 * normal population lies below it. K = t(confidence; n − 1, √n·z(share))/√n.
 *
 * @throws RangeError below two samples.
 * @source johnson-welch-1940
 */
export function toleranceFactor(sampleCount: number, share = 0.95, confidence = 0.95): number {
  if (!(sampleCount >= 2)) throw new RangeError("A tolerance limit needs at least two samples");
  const root = Math.sqrt(sampleCount);
  return noncentralTQuantile(confidence, sampleCount - 1, root * normalQuantile(share)) / root;
}

/**
 * Upper confidence bound of the share of a normal population above a level, 0 to 1, where `distance` is
 * (level − mean)/sd of the samples: the noncentrality for which so large a distance has a probability of 1 − confidence.
 *
 * @throws RangeError below two samples.
 * @source johnson-welch-1940
 */
export function exceedanceBound(sampleCount: number, distance: number, confidence = 0.95): number {
  if (!(sampleCount >= 2)) throw new RangeError("An exceedance bound needs at least two samples");
  const root = Math.sqrt(sampleCount);
  const t = distance * root;
  // The share falls as the noncentrality grows.
  const excess = (noncentrality: number) =>
    confidence - noncentralTShare(t, sampleCount - 1, noncentrality);
  let reach = Math.abs(t) + 5;
  while (excess(-reach) > 0 || excess(reach) < 0) {
    if (reach > 1e6) return t > 0 ? 0 : 1;
    reach *= 2;
  }
  return normalShare(-solveSmooth(excess, -reach, reach) / root);
}

/** Root of an increasing function, by false position with the Illinois step: a tenth of the integrations of halving. */
function solveSmooth(f: (x: number) => number, from: number, to: number): number {
  let low = from;
  let high = to;
  let atLow = f(low);
  let atHigh = f(high);
  let side = 0;
  for (let step = 0; step < 200 && high - low > 1e-12 * (1 + Math.abs(low)); step++) {
    const middle =
      step % 8 === 7 ? (low + high) / 2 : high - (atHigh * (high - low)) / (atHigh - atLow);
    const value = f(middle);
    if (Math.abs(value) < 1e-14) return middle;
    if (value < 0) {
      low = middle;
      atLow = value;
      if (side < 0) atHigh /= 2;
      side = -1;
    } else {
      high = middle;
      atHigh = value;
      if (side > 0) atLow /= 2;
      side = 1;
    }
  }
  return (low + high) / 2;
}
