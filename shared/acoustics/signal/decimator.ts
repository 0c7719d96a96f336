import { flushDecayed } from "./sections";

/** Share of the incoming rate up to which nothing is lost; what would fold below it is more than 90 dB down. */
export const KEPT_SHARE = 0.1875;

const SECTIONS = 5;
const [C0, C1, C2, C3, C4] = halfBandCoefficients(SECTIONS, KEPT_SHARE) as [
  number,
  number,
  number,
  number,
  number,
];

/**
 * Coefficients of the all-pass sections whose half-sum is an elliptic half-band low-pass, those of the two branches in
 * turn. `keptShare`: end of the pass band as a share of the rate.
 *
 * Valenzuela and Constantinides, Digital signal processing schemes for efficient interpolation and decimation, 1983.
 */
function halfBandCoefficients(count: number, keptShare: number): readonly number[] {
  const k = Math.tan(Math.PI * keptShare) ** 2;
  const root = (1 - k * k) ** 0.25;
  const e = (1 - root) / (1 + root) / 2;
  const q = e * (1 + e ** 4 * (2 + e ** 4 * (15 + 150 * e ** 4)));
  const order = 2 * count + 1;
  return Array.from({ length: count }, (_, index) => {
    const angle = ((index + 1) * Math.PI) / order;
    let upper = 0;
    let lower = 0.5;
    for (let term = 0; term < 8; term++) {
      const sign = term % 2 === 0 ? 1 : -1;
      upper += sign * q ** (term * (term + 1)) * Math.sin((2 * term + 1) * angle);
      lower -= sign * q ** ((term + 1) ** 2) * Math.cos(2 * (term + 1) * angle);
    }
    const w = ((q ** 0.25 * upper) / lower) ** 2;
    const r = Math.sqrt((1 - w * k) * (1 - w / k)) / (1 + w);
    return (1 - r) / (1 + r);
  });
}

/** Halves the sampling rate. Phases are not kept, powers are: what band levels need. */
export class Decimator {
  private readonly states = new Float64Array(7);

  /** Takes an even number of samples and writes half as many. */
  process(input: Float64Array, length: number, output: Float64Array): void {
    const { states } = this;
    let x0 = states[0]!;
    let y0 = states[1]!;
    let y2 = states[2]!;
    let y4 = states[3]!;
    let x1 = states[4]!;
    let y1 = states[5]!;
    let y3 = states[6]!;
    // A section is y = x₋₁ + c·(x − y₋₁); what one puts out is what the next takes in.
    for (let at = 0, out = 0; at < length; at += 2, out++) {
      const even = input[at]!;
      const odd = input[at + 1]!;
      const a = x0 + C0 * (odd - y0);
      const b = y0 + C2 * (a - y2);
      const c = y2 + C4 * (b - y4);
      const d = x1 + C1 * (even - y1);
      const f = y1 + C3 * (d - y3);
      x0 = odd;
      y0 = a;
      y2 = b;
      y4 = c;
      x1 = even;
      y1 = d;
      y3 = f;
      output[out] = 0.5 * (c + f);
    }
    states[0] = x0;
    states[1] = y0;
    states[2] = y2;
    states[3] = y4;
    states[4] = x1;
    states[5] = y1;
    states[6] = y3;
    flushDecayed(states);
  }
}
