import FFT from "fft.js";

/** Coarsest step of the spectrum, Hz: the lowest octave, 45 to 89 Hz, then holds fifteen lines and more. */
const COARSEST_HZ = 3;

export const powerOfTwoFrom = (atLeast: number) => 2 ** Math.ceil(Math.log2(atLeast));

/** Cross-spectrum of two sounds up to a line, conj(X)·Y; where Y is X later, its phase falls with frequency. */
export interface CrossSpectrum {
  readonly re: Float64Array;
  readonly im: Float64Array;
}

/**
 * Spectra of two real signals from one transform: the first in the real, the second in the imaginary part. `add` gets
 * each line from the first one above 0 Hz to `lastLine`.
 */
function separate(
  both: Float64Array,
  lastLine: number,
  add: (line: number, xRe: number, xIm: number, yRe: number, yIm: number) => void,
): void {
  const length = both.length / 2;
  for (let line = 1; line <= lastLine; line++) {
    const re = both[2 * line]!;
    const im = both[2 * line + 1]!;
    const mirrorRe = both[2 * (length - line)]!;
    const mirrorIm = both[2 * (length - line) + 1]!;
    add(line, (re + mirrorRe) / 2, (im - mirrorIm) / 2, (im + mirrorIm) / 2, (mirrorRe - re) / 2);
  }
}

/**
 * Auto-spectra and cross-spectrum of two channels, averaged over segments under a Hann window that overlap by half.
 *
 * @source welch-1967
 */
export class CrossSpectra {
  readonly length: number;
  readonly hop: number;
  readonly stepHz: number;
  /** Sums of |X|², |Y|² and conj(X)·Y over the segments, by line. */
  readonly first: Float64Array;
  readonly second: Float64Array;
  readonly cross: CrossSpectrum;
  segments = 0;
  private readonly fft: FFT;
  private readonly window: Float64Array;
  private readonly input: Float64Array;
  private readonly output: Float64Array;

  /** @param topHz up to where spectra are wanted */
  constructor(
    rateHz: number,
    private readonly topHz: number,
  ) {
    this.length = powerOfTwoFrom(rateHz / COARSEST_HZ);
    this.hop = this.length / 2;
    this.stepHz = rateHz / this.length;
    const lines = Math.min(this.hop, Math.ceil(this.topHz / this.stepHz) + 1);
    this.first = new Float64Array(lines);
    this.second = new Float64Array(lines);
    this.cross = { re: new Float64Array(lines), im: new Float64Array(lines) };
    this.fft = new FFT(this.length);
    this.window = Float64Array.from(
      { length: this.length },
      (_, at) => 0.5 - 0.5 * Math.cos((2 * Math.PI * at) / this.length),
    );
    this.input = new Float64Array(2 * this.length);
    this.output = new Float64Array(2 * this.length);
  }

  /** Takes one segment of `length` samples of each channel. What stands still in it, an offset, counts nothing. */
  add(x: Float32Array, y: Float32Array): void {
    const { input, output, window, length, first, second, cross } = this;
    const xOffset = mean(x, length);
    const yOffset = mean(y, length);
    for (let at = 0; at < length; at++) {
      input[2 * at] = window[at]! * (x[at]! - xOffset);
      input[2 * at + 1] = window[at]! * (y[at]! - yOffset);
    }
    this.fft.transform(output, input);
    separate(output, first.length - 1, (line, xRe, xIm, yRe, yIm) => {
      first[line]! += xRe * xRe + xIm * xIm;
      second[line]! += yRe * yRe + yIm * yIm;
      cross.re[line]! += xRe * yRe + xIm * yIm;
      cross.im[line]! += xRe * yIm - xIm * yRe;
    });
    this.segments++;
  }

  /** What turns a sum over lines into a mean square: both sides of the spectrum, the window's power, the segments. */
  get scale(): number {
    return this.segments === 0 ? 0 : 2 / (this.length * 0.375 * this.length * this.segments);
  }
}

function mean(samples: Float32Array, length: number): number {
  let sum = 0;
  for (let at = 0; at < length; at++) sum += samples[at]!;
  return sum / length;
}

/** A correlation's largest value, and how far it stands out. */
export interface CorrelationPeak {
  /** Samples by which the second is behind the first; between samples too. */
  readonly lagSamples: number;
  /** Over the root mean square of the correlation at all lags. */
  readonly distinctness: number;
}

/**
 * Peak of the correlation that belongs to a cross-spectrum, of either sign: a microphone can be wired the other way
 * round. `length`: of the transform that the lines are of.
 */
export function correlationPeak(
  { re, im }: CrossSpectrum,
  length: number,
  maxLagSamples: number,
): CorrelationPeak {
  const input = new Float64Array(2 * length);
  for (let line = 1; line < re.length; line++) {
    input[2 * line] = re[line]!;
    input[2 * line + 1] = im[line]!;
  }
  const output = new Float64Array(2 * length);
  new FFT(length).inverseTransform(output, input);
  const at = (lag: number) => Math.abs(output[2 * ((lag + length) % length)]!);
  let squares = 0;
  for (let index = 0; index < length; index++) squares += output[2 * index]! ** 2;
  const reach = Math.min(Math.floor(maxLagSamples), length / 2 - 1);
  let lag = 0;
  for (let one = -reach; one <= reach; one++) if (at(one) > at(lag)) lag = one;
  const peak = at(lag);
  const [before, after] = [at(lag - 1), at(lag + 1)];
  // A parabola through the three highest.
  const bend = before - 2 * peak + after;
  const between = bend < 0 ? Math.max(-0.5, Math.min(0.5, (before - after) / (2 * bend))) : 0;
  const rms = Math.sqrt(squares / length);
  return { lagSamples: lag + between, distinctness: rms > 0 ? peak / rms : 0 };
}

/**
 * Cross-spectrum of a long stretch as a whole, every line of the band at one magnitude, so that the correlation has one
 * narrow peak whatever the noise and the cup do to the spectrum.
 *
 * @source knapp-carter-1976 phase transform
 */
export function whitenedCrossSpectrum(
  x: Float32Array,
  y: Float32Array,
  rateHz: number,
  [fromHz, toHz]: readonly [number, number],
): { spectrum: CrossSpectrum; length: number } {
  const length = powerOfTwoFrom(2 * Math.max(x.length, y.length));
  const input = new Float64Array(2 * length);
  for (let at = 0; at < x.length; at++) input[2 * at] = x[at]!;
  for (let at = 0; at < y.length; at++) input[2 * at + 1] = y[at]!;
  const output = new Float64Array(2 * length);
  new FFT(length).transform(output, input);
  const lines = Math.min(length / 2, Math.ceil((toHz / rateHz) * length) + 1);
  const spectrum = { re: new Float64Array(lines), im: new Float64Array(lines) };
  const firstLine = (fromHz / rateHz) * length;
  separate(output, lines - 1, (line, xRe, xIm, yRe, yIm) => {
    const re = xRe * yRe + xIm * yIm;
    const im = xRe * yIm - xIm * yRe;
    const size = Math.hypot(re, im);
    if (line < firstLine || size === 0) return;
    spectrum.re[line] = re / size;
    spectrum.im[line] = im / size;
  });
  return { spectrum, length };
}
