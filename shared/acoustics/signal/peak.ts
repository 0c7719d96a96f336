/** Samples on either side that an interpolated value rests on. */
const REACH = 12;
const KAISER_BETA = 8;
/** Rate to which peaks are interpolated at least: a tone of 20 kHz then lies within 0.15 dB of its peak. */
const INTERPOLATED_RATE_HZ = 350_000;
/**
 * Between samples is looked only beside a sample of at least half the peak so far. Of a tone below a third of the
 * sampling rate one always is; above it, the weighting leaves little.
 */
const WORTH_LOOKING = 0.5;
/** And closely only where the value halfway or the sample beside it comes near the peak: cos 30° for such a tone. */
const WORTH_A_CLOSE_LOOK = 0.86;

/** Peak of a signal's magnitude, between its samples too. */
export class PeakDetector {
  peak = 0;
  private readonly line: Float64Array;
  private readonly halfway = kernelAt(0.5);
  private readonly kernels: readonly Float64Array[];

  constructor(
    rateHz: number,
    private readonly longestBlock: number,
  ) {
    this.line = new Float64Array(2 * REACH + longestBlock);
    const steps = 2 * Math.ceil(INTERPOLATED_RATE_HZ / rateHz / 2);
    this.kernels = Array.from({ length: steps - 1 }, (_, index) => kernelAt((index + 1) / steps));
  }

  /** Looks as far as REACH samples before the end of the block: `finish` takes the last ones. */
  process(signal: Float64Array, length: number): void {
    const { line } = this;
    line.set(length === this.longestBlock ? signal : signal.subarray(0, length), 2 * REACH);
    let peak = this.peak;
    const end = length + REACH;
    for (let at = REACH; at < end; at++) {
      const size = Math.abs(line[at]!);
      if (size <= WORTH_LOOKING * peak) continue;
      const before = Math.abs(line[at - 1]!);
      const after = Math.abs(line[at + 1]!);
      if (size < before || size < after) continue;
      if (size > peak) peak = size;
      peak = this.between(after >= before ? at : at - 1, peak);
    }
    this.peak = peak;
    line.copyWithin(0, length, length + 2 * REACH);
  }

  /** The last samples count as they are: silence taken to follow them would add an overshoot of its own. */
  finish(): void {
    for (let at = REACH; at < 2 * REACH; at++)
      this.peak = Math.max(this.peak, Math.abs(this.line[at]!));
  }

  private between(left: number, peak: number): number {
    const start = left - REACH + 1;
    const { line, halfway, kernels } = this;
    const middle = Math.abs(interpolate(line, start, halfway));
    const nearest = Math.max(middle, Math.abs(line[left]!), Math.abs(line[left + 1]!));
    if (nearest <= WORTH_A_CLOSE_LOOK * peak) return peak;
    let highest = Math.max(peak, middle);
    for (let index = 0; index < kernels.length; index++)
      highest = Math.max(highest, Math.abs(interpolate(line, start, kernels[index]!)));
    return highest;
  }
}

function interpolate(line: Float64Array, start: number, kernel: Float64Array): number {
  let value = 0;
  for (let tap = 0; tap < 2 * REACH; tap++) value += kernel[tap]! * line[start + tap]!;
  return value;
}

/** Windowed sinc at a fraction of the way between two samples. */
function kernelAt(fraction: number): Float64Array {
  return Float64Array.from({ length: 2 * REACH }, (_, tap) => {
    const offset = tap - (REACH - 1) - fraction;
    const sinc = Math.sin(Math.PI * offset) / (Math.PI * offset);
    return sinc * kaiser(offset / REACH, KAISER_BETA);
  });
}

/** Kaiser's window at a place between −1 and 1. */
function kaiser(place: number, beta: number): number {
  return bessel0(beta * Math.sqrt(1 - place * place)) / bessel0(beta);
}

/** Modified Bessel function of order 0. */
function bessel0(x: number): number {
  let term = 1;
  let sum = 1;
  for (let k = 1; term > 1e-17 * sum; k++) {
    term *= (x / (2 * k)) ** 2;
    sum += term;
  }
  return sum;
}
