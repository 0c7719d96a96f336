import { arithmeticMean } from "../mean";
import { leastSquares } from "./least-squares";

const REFERENCE_PRESSURE_PA = 20e-6;
const FRAME_S = 0.125;
/** A tone has to hold this long to be read. */
const SHORTEST_S = 2;
/** Largest difference between the frames of a steady stretch, dB. */
const STEADY_WITHIN_DB = 0.2;
/** A calibrator's frequency may be off by this share of the nominal one. @source iec-60942 5.3.3, class 2 */
const FREQUENCY_WITHIN = 0.02;
/** Least share of a frame's energy that has to be the tone: the rest is noise, hum or overtones. */
const TONE_SHARE = 0.98;

export interface ToneOptions {
  readonly rateHz: number;
  /** What the calibrator is said to give, 94 or 114 dB as a rule. */
  readonly toneLevelDb: number;
  /** 1000 Hz unless the calibrator has another. */
  readonly frequencyHz: number;
}

/** What was found of a tone in one channel. */
export type ToneReading =
  | {
      readonly found: true;
      readonly paPerFullScale: number;
      /** dB re a full-scale value of 1. */
      readonly levelDb: number;
      readonly frequencyHz: number;
      /** Between the loudest and the softest eighth of a second that were used, dB. */
      readonly spreadDb: number;
      readonly startS: number;
      readonly durationS: number;
    }
  | {
      readonly found: false;
      readonly reason: "no-tone" | "unsteady" | "frequency-off";
      /** Where something like a tone was there. */
      readonly frequencyHz: number | null;
      readonly longestSteadyS: number;
    };

interface Frame {
  readonly square: number;
  readonly frequencyHz: number;
}

/**
 * Reads a calibrator's tone in one channel of a recording, fed block by block: the longest stretch over which it is a
 * tone, at its frequency, and steady. What was recorded while the calibrator was put on and taken off is left out.
 *
 * The sensitivity follows from the root mean square of that stretch: pascals at full scale =
 * 20 µPa · 10^(L/20) / rms.
 *
 * @source iec-60942 5
 */
export class CalibrationTone {
  private readonly frames: (Frame | null)[] = [];
  private readonly frame: Float64Array;
  private filled = 0;

  constructor(private readonly options: ToneOptions) {
    this.frame = new Float64Array(Math.round(FRAME_S * options.rateHz));
  }

  feed(block: Float32Array): void {
    for (let at = 0; at < block.length; at++) {
      this.frame[this.filled++] = block[at]!;
      if (this.filled < this.frame.length) continue;
      this.frames.push(readFrame(this.frame, this.options));
      this.filled = 0;
    }
  }

  finish(): ToneReading {
    const { frames, options } = this;
    const isRight = (frame: Frame | null): frame is Frame =>
      frame !== null && Math.abs(frame.frequencyHz / options.frequencyHz - 1) <= FREQUENCY_WITHIN;
    const stretch = longestSteady(frames.map((frame) => (isRight(frame) ? frame : null)));
    const longestSteadyS = stretch.frames.length * FRAME_S;
    if (longestSteadyS < SHORTEST_S) {
      const tones = frames.filter((frame) => frame !== null);
      const isOff = longestSteady(frames).frames.length * FRAME_S >= SHORTEST_S;
      return {
        found: false,
        reason: isOff
          ? "frequency-off"
          : tones.length * FRAME_S < SHORTEST_S
            ? "no-tone"
            : "unsteady",
        frequencyHz:
          tones.length === 0 ? null : arithmeticMean(tones.map((frame) => frame.frequencyHz)),
        longestSteadyS,
      };
    }
    const squares = stretch.frames.map((frame) => frame.square);
    const square = arithmeticMean(squares);
    return {
      found: true,
      paPerFullScale:
        (REFERENCE_PRESSURE_PA * 10 ** (options.toneLevelDb / 20)) / Math.sqrt(square),
      levelDb: 10 * Math.log10(square),
      frequencyHz: arithmeticMean(stretch.frames.map((frame) => frame.frequencyHz)),
      spreadDb: 10 * Math.log10(Math.max(...squares) / Math.min(...squares)),
      startS: stretch.start * FRAME_S,
      durationS: longestSteadyS,
    };
  }
}

/** The longest run of frames whose levels all lie within STEADY_WITHIN_DB. */
function longestSteady(frames: readonly (Frame | null)[]): { start: number; frames: Frame[] } {
  let best: Frame[] = [];
  let bestStart = 0;
  let run: Frame[] = [];
  for (const [index, frame] of frames.entries()) {
    if (frame === null) {
      run = [];
      continue;
    }
    // From the back: how far the run goes on with this frame in it.
    let lowest = frame.square;
    let highest = frame.square;
    let from = run.length;
    while (from > 0) {
      const { square } = run[from - 1]!;
      const low = Math.min(lowest, square);
      const high = Math.max(highest, square);
      if (10 * Math.log10(high / low) > STEADY_WITHIN_DB) break;
      lowest = low;
      highest = high;
      from--;
    }
    run = [...run.slice(from), frame];
    if (run.length > best.length) {
      best = run;
      bestStart = index - run.length + 1;
    }
  }
  return { start: bestStart, frames: best };
}

/** The sine in a frame, or null where it is not a tone. */
function readFrame(frame: Float64Array, { rateHz, frequencyHz }: ToneOptions): Frame | null {
  const half = frame.length >> 1;
  // The phase advances between the two halves by the frequency's distance from the nominal one, to ±8 Hz at once; a
  // coarse look first, over neighbours, tells which turn it is on.
  const coarseHz = coarseFrequency(frame, rateHz);
  if (coarseHz === null || Math.abs(coarseHz / frequencyHz - 1) > 0.5) return null;
  const early = phaseAt(frame.subarray(0, half), coarseHz, rateHz, 0);
  const late = phaseAt(frame.subarray(half, 2 * half), coarseHz, rateHz, half);
  const turn = (((((late - early) / (2 * Math.PI)) % 1) + 1.5) % 1) - 0.5;
  const fineHz = coarseHz + (turn * rateHz) / half;
  const step = (2 * Math.PI * fineHz) / rateHz;
  const cosines = frame.map((_, at) => Math.cos(step * at));
  const sines = frame.map((_, at) => Math.sin(step * at));
  const [re = 0, im = 0, offset = 0] = leastSquares(
    [cosines, sines, new Float64Array(frame.length).fill(1)],
    frame,
  );
  let whole = 0;
  for (const value of frame) whole += (value - offset) ** 2;
  const square = (re * re + im * im) / 2;
  return square > TONE_SHARE * (whole / frame.length) ? { square, frequencyHz: fineHz } : null;
}

/** From x₋₁ + x₊₁ = 2·cos ω·x, which a sine obeys. */
function coarseFrequency(frame: Float64Array, rateHz: number): number | null {
  // Neighbours a fifth of a millisecond apart: with closer ones, noise would pull the frequency up.
  const lag = Math.round(rateHz / 4800);
  let cross = 0;
  let own = 0;
  const offset = frame.reduce((sum, value) => sum + value, 0) / frame.length;
  for (let at = lag; at < frame.length - lag; at++) {
    const value = frame[at]! - offset;
    cross += value * (frame[at - lag]! + frame[at + lag]! - 2 * offset);
    own += value * value;
  }
  const cosine = cross / (2 * own);
  if (!(Math.abs(cosine) < 1)) return null;
  return (Math.acos(cosine) * rateHz) / (2 * Math.PI * lag);
}

function phaseAt(part: Float64Array, frequencyHz: number, rateHz: number, start: number): number {
  const step = (2 * Math.PI * frequencyHz) / rateHz;
  let re = 0;
  let im = 0;
  for (let at = 0; at < part.length; at++) {
    re += part[at]! * Math.cos(step * (at + start));
    im += part[at]! * Math.sin(step * (at + start));
  }
  return Math.atan2(-im, re);
}
