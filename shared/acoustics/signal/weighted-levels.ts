import { PeakDetector } from "./peak";
import { flushDecayed } from "./sections";
import { designWeightings } from "./weighting";

/** Time constants of F and S, seconds. @source iec-61672-1 5.8 */
const FAST_S = 0.125;
const SLOW_S = 1;
/** Below this a steady part is no sound but the recorder's offset; it costs 0.04 dB at 10 Hz. */
const OFFSET_CORNER_HZ = 1;

// Places in `states`, so that the loop keeps them in local variables and nothing is allocated per block.
const STATES = 11;
const SLOW = 10;

/**
 * What a sound level meter reads of one channel: A-, C- and unweighted energies, maxima on F and S, the C-weighted
 * peak, and one value a second. All in squares of the unit of the samples.
 *
 * The S and F detectors start from nothing, as a meter does when it is switched on: S is within 0.1 dB of a steady
 * sound after 3.8 s.
 */
export class WeightedLevels {
  samples = 0;
  aEnergy = 0;
  cEnergy = 0;
  zEnergy = 0;
  fastMax = 0;
  slowMax = 0;
  /** Mean A-weighted square of each whole second, and the S-weighted square at its end. */
  readonly secondsEqual: number[] = [];
  readonly secondsSlow: number[] = [];
  private readonly peakDetector: PeakDetector;
  private readonly cSignal: Float64Array;
  private readonly states = new Float64Array(STATES);
  private readonly constants: Float64Array;
  private secondEnergy = 0;
  private secondSamples = 0;
  private lastInput: number | null = null;

  constructor(
    private readonly rateHz: number,
    longestBlock: number,
  ) {
    const { c, aAfterC } = designWeightings(rateHz);
    // The high pole's section stands there twice, with the same constants.
    const [low, high] = c;
    this.constants = Float64Array.of(
      Math.exp((-2 * Math.PI * OFFSET_CORNER_HZ) / rateHz),
      low.b0,
      low.a1,
      low.a2,
      high.b0,
      high.b1,
      high.b2,
      high.a1,
      high.a2,
      aAfterC.b0,
      aAfterC.a1,
      aAfterC.a2,
      -Math.expm1(-1 / (FAST_S * rateHz)),
      -Math.expm1(-1 / (SLOW_S * rateHz)),
    );
    this.cSignal = new Float64Array(longestBlock);
    this.peakDetector = new PeakDetector(rateHz, longestBlock);
  }

  get cPeak(): number {
    return this.peakDetector.peak;
  }

  /** Takes a block and writes it, freed of its offset, to `unweighted`. */
  process(input: Float32Array, length: number, unweighted: Float64Array): void {
    // A recorder's offset must not look like a click at the start.
    if (this.lastInput === null && length > 0) this.lastInput = mean(input, length);
    for (let from = 0; from < length; ) {
      const to = Math.min(length, from + this.rateHz - this.secondSamples);
      this.filter(input, from, to, unweighted);
      this.secondSamples += to - from;
      if (this.secondSamples === this.rateHz) {
        this.secondsEqual.push(this.secondEnergy / this.rateHz);
        this.secondsSlow.push(this.states[SLOW]!);
        this.secondSamples = 0;
        this.secondEnergy = 0;
      }
      from = to;
    }
    this.samples += length;
    flushDecayed(this.states);
    this.peakDetector.process(this.cSignal, length);
  }

  finish(): void {
    this.peakDetector.finish();
  }

  private filter(input: Float32Array, from: number, to: number, unweighted: Float64Array): void {
    const { constants: k, states, cSignal } = this;
    const keep = k[0]!;
    const lowGain = k[1]!;
    const low1 = k[2]!;
    const low2 = k[3]!;
    const high0 = k[4]!;
    const high1 = k[5]!;
    const high2 = k[6]!;
    const high3 = k[7]!;
    const high4 = k[8]!;
    const aGain = k[9]!;
    const a1 = k[10]!;
    const a2 = k[11]!;
    const fastStep = k[12]!;
    const slowStep = k[13]!;
    let last = this.lastInput!;
    let z = states[0]!;
    let l1 = states[1]!;
    let l2 = states[2]!;
    let h1 = states[3]!;
    let h2 = states[4]!;
    let i1 = states[5]!;
    let i2 = states[6]!;
    let w1 = states[7]!;
    let w2 = states[8]!;
    let fast = states[9]!;
    let slow = states[10]!;
    let { fastMax, slowMax } = this;
    let zSum = 0;
    let cSum = 0;
    let aSum = 0;
    for (let at = from; at < to; at++) {
      const x = input[at]!;
      z = x - last + keep * z;
      last = x;
      unweighted[at] = z;
      zSum += z * z;
      const u = z * lowGain;
      const v = u + l1;
      l1 = l2 - 2 * u - low1 * v;
      l2 = u - low2 * v;
      const w = high0 * v + h1;
      h1 = h2 + high1 * v - high3 * w;
      h2 = high2 * v - high4 * w;
      const c = high0 * w + i1;
      i1 = i2 + high1 * w - high3 * c;
      i2 = high2 * w - high4 * c;
      cSignal[at] = c;
      cSum += c * c;
      const p = c * aGain;
      const a = p + w1;
      w1 = w2 - 2 * p - a1 * a;
      w2 = p - a2 * a;
      const square = a * a;
      aSum += square;
      fast += fastStep * (square - fast);
      slow += slowStep * (square - slow);
      if (fast > fastMax) fastMax = fast;
      if (slow > slowMax) slowMax = slow;
    }
    this.lastInput = last;
    states[0] = z;
    states[1] = l1;
    states[2] = l2;
    states[3] = h1;
    states[4] = h2;
    states[5] = i1;
    states[6] = i2;
    states[7] = w1;
    states[8] = w2;
    states[9] = fast;
    states[10] = slow;
    this.fastMax = fastMax;
    this.slowMax = slowMax;
    this.zEnergy += zSum;
    this.cEnergy += cSum;
    this.aEnergy += aSum;
    this.secondEnergy += aSum;
  }
}

function mean(samples: Float32Array, length: number): number {
  let sum = 0;
  for (let at = 0; at < length; at++) sum += samples[at]!;
  return sum / length;
}
