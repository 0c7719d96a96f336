import { OCTAVE_BANDS_HZ } from "../types";
import { SAMPLE_RATES_HZ } from "./analyse-sound";
import { ClipCounter } from "./clipping";
import {
  CrossSpectra,
  correlationPeak,
  powerOfTwoFrom,
  whitenedCrossSpectrum,
} from "./cross-spectra";
import { SampleLine } from "./sample-line";
import { type Band, OCTAVE_BANDS } from "./third-octave";

const REFERENCE_PRESSURE_PA = 20e-6;
const BANDS: readonly Band[] = OCTAVE_BANDS_HZ.map(
  (hz) => OCTAVE_BANDS.find(({ nominalHz }) => nominalHz === hz)!,
);
const LOWEST_HZ = BANDS[0]!.lowerHz;
const HIGHEST_HZ = BANDS.at(-1)!.upperHz;

/** A pair of recordings says nothing below this, s: the 63 Hz octave then has a deviation of 0.3 dB. */
export const SHORTEST_PAIR_S = 5;
/** A channel has to stand so far above its floor: what the floor adds is then less than 0.5 dB. */
const ABOVE_FLOOR_DB = 10;
/** What a microphone and its recorder make by themselves in an octave, dB, where levels are known. Common practice, no source. */
const SELF_NOISE_DB = 20;
/**
 * Least squared coherence of a band: half of what is inside then comes from the noise outside, and the noise reduction is
 * at most 3 dB too low, never too high. Common practice, no source.
 */
const LEAST_COHERENCE = 0.5;
/** A channel so far under the other, with nothing in common, hears nothing. Common practice, no source. */
const DEAD_BELOW_DB = 60;
/** A peak counts as a delay where it stands out so far; of noise alone the highest of many lags comes to 5. */
const DISTINCT = 8;
/** Delay looked for once the channels are aligned, s. */
const FINE_LAG_S = 0.005;
const HIGHEST_WEIGHT = 100;

export interface MicrophonePairOptions {
  readonly rateHz: number;
  /** Sound pressure at full scale, Pa; both or none: with one alone, levels stay relative. */
  readonly outsidePa: number | null;
  readonly insidePa: number | null;
  /** Smallest step that the samples' format holds, as a share of full scale. */
  readonly step: number;
  /** Largest value that it holds; 1 for floating point. */
  readonly fullScale?: number;
  /** How far the channels may lie apart, s: little in one file, seconds in two. */
  readonly maxLagS: number;
}

export type BandReason = "too-little-noise" | "low-coherence" | "not-typed";

export interface MeasuredBand {
  readonly frequencyHz: number;
  /** dB re 20 µPa, or re full scale where levels are relative. Null: nothing there. */
  readonly outsideDb: number | null;
  readonly insideDb: number | null;
  /** Squared coherence, 0 to 1, over the band by the geometric mean of both powers; null: typed. */
  readonly coherence: number | null;
  /** Why the band says nothing by itself. */
  readonly reason: BandReason | null;
}

export interface MicrophonePairReading {
  readonly isAbsolute: boolean;
  readonly rateHz: number;
  /** Of what both channels have in common, s. */
  readonly durationS: number;
  /** Inside behind outside; null where no lag stands out. */
  readonly delayS: number | null;
  readonly delaySamples: number | null;
  readonly bands: readonly MeasuredBand[];
  /** A channel that holds nothing. */
  readonly deadChannel: "outside" | "inside" | "both" | null;
  readonly clippedPct: { readonly outside: number; readonly inside: number };
}

/**
 * Two microphones at one ear, outside and inside the cup: levels by octave band from auto-spectra, the coherence of the
 * two, and by how much the inside is behind. Fed block by block; memory grows with neither length nor offset.
 *
 * The channels are aligned before their spectra are taken: a lag that is long against a segment would lower the
 * coherence of what belongs together.
 *
 * @source welch-1967
 * @source knapp-carter-1976
 * @source iec-61260-1 5.4
 */
export class MicrophonePair {
  private readonly spectra: CrossSpectra;
  private readonly outside = new SampleLine();
  private readonly inside = new SampleLine();
  private readonly clips: { outside: ClipCounter; inside: ClipCounter };
  private readonly alignFrom: number;
  private shift: number | null = null;
  private frames = 0;

  /** @throws RangeError at a rate for which there are no filters, or a sensitivity that is none. */
  constructor(private readonly options: MicrophonePairOptions) {
    const { rateHz, outsidePa, insidePa, fullScale = 1, maxLagS } = options;
    if (!(SAMPLE_RATES_HZ as readonly number[]).includes(rateHz))
      throw new RangeError(`no bands for ${rateHz} Hz`);
    if ([outsidePa, insidePa].some((pa) => pa !== null && !(pa > 0 && pa < Infinity)))
      throw new RangeError("a sensitivity is a positive number of pascals");
    this.spectra = new CrossSpectra(rateHz, HIGHEST_HZ);
    this.clips = { outside: new ClipCounter(fullScale), inside: new ClipCounter(fullScale) };
    this.alignFrom = powerOfTwoFrom(rateHz * Math.max(1, 2.5 * maxLagS));
  }

  /** Takes a block of each channel, of any length; they may be used again afterwards. */
  feed(outside: Float32Array, inside: Float32Array): void {
    this.clips.outside.process(outside, outside.length);
    this.clips.inside.process(inside, inside.length);
    this.outside.push(outside);
    this.inside.push(inside);
    if (this.shift !== null || Math.min(this.outside.length, this.inside.length) >= this.alignFrom)
      this.advance();
  }

  /** What both channels say. Nothing can be fed afterwards. */
  finish(): MicrophonePairReading {
    this.advance();
    const { rateHz, outsidePa, insidePa } = this.options;
    const isAbsolute = outsidePa !== null && insidePa !== null;
    const bands = BANDS.map((band) => this.measure(band));
    const delaySamples = this.delaySamples();
    return {
      isAbsolute,
      rateHz,
      durationS: this.frames / rateHz,
      delaySamples,
      delayS: delaySamples === null ? null : delaySamples / rateHz,
      bands,
      deadChannel: deadChannel(bands, (side) => this.floorDb(side, LOWEST_HZ, HIGHEST_HZ)),
      clippedPct: {
        outside: this.clips.outside.sharePct,
        inside: this.clips.inside.sharePct,
      },
    };
  }

  private advance(): void {
    const { outside, inside, spectra } = this;
    this.shift ??= this.align();
    const { length, hop } = spectra;
    while (Math.min(outside.length, inside.length) >= length) {
      spectra.add(outside.view(length), inside.view(length));
      outside.drop(hop);
      inside.drop(hop);
      this.frames += this.frames === 0 ? length : hop;
    }
  }

  /** Lets go of what only the one that began earlier has. Returns the samples by which the inside was behind. */
  private align(): number {
    const { rateHz, maxLagS } = this.options;
    const [x, y] = [this.outside, this.inside].map((line) => line.view(this.alignFrom));
    if (x!.length === 0 || y!.length === 0) return 0;
    const range = [LOWEST_HZ, HIGHEST_HZ] as const;
    const { spectrum, length } = whitenedCrossSpectrum(x!, y!, rateHz, range);
    const { lagSamples, distinctness } = correlationPeak(spectrum, length, maxLagS * rateHz);
    if (distinctness < DISTINCT) return 0;
    const shift = Math.round(lagSamples);
    if (shift > 0) this.inside.drop(shift);
    else this.outside.drop(-shift);
    return shift;
  }

  /** What is left after the alignment, from the lines by how much they have in common. */
  private delaySamples(): number | null {
    const { first, second, cross, length, segments } = this.spectra;
    if (segments < 2) return null;
    const weighted = { re: new Float64Array(first.length), im: new Float64Array(first.length) };
    const firstLine = LOWEST_HZ / this.spectra.stepHz;
    for (let line = Math.ceil(firstLine); line < first.length; line++) {
      const size = Math.hypot(cross.re[line]!, cross.im[line]!);
      const coherence = size ** 2 / (first[line]! * second[line]!);
      // Of few segments any two noises have a coherence of one over their number.
      if (!(size > 0 && coherence > 3 / segments)) continue;
      const weight = Math.min(HIGHEST_WEIGHT, coherence / (1 - Math.min(coherence, 1 - 1e-9)));
      weighted.re[line] = (weight * cross.re[line]!) / size;
      weighted.im[line] = (weight * cross.im[line]!) / size;
    }
    const reach = FINE_LAG_S * this.options.rateHz;
    const { lagSamples, distinctness } = correlationPeak(weighted, length, reach);
    return distinctness < DISTINCT ? null : (this.shift ?? 0) + lagSamples;
  }

  private measure(band: Band): MeasuredBand {
    const { first, second, cross, stepHz, scale } = this.spectra;
    let outside = 0;
    let inside = 0;
    let common = 0;
    let both = 0;
    const lastLine = Math.min(first.length - 1, Math.ceil(band.upperHz / stepHz));
    for (let line = Math.floor(band.lowerHz / stepHz); line <= lastLine; line++) {
      const share = shareInBand(line * stepHz, stepHz, band);
      const x = first[line]!;
      const y = second[line]!;
      outside += share * x;
      inside += share * y;
      if (share === 0 || x === 0 || y === 0) continue;
      const mean = Math.sqrt(x * y);
      both += share * mean;
      common += (share * (cross.re[line]! ** 2 + cross.im[line]! ** 2)) / mean;
    }
    return this.judge(band, scale * outside, scale * inside, both > 0 ? common / both : 0);
  }

  private judge(band: Band, outside: number, inside: number, coherence: number): MeasuredBand {
    const outsideDb = this.levelDb("outside", outside);
    const insideDb = this.levelDb("inside", inside);
    const isHeard = (side: Side, levelDb: number | null) =>
      levelDb !== null &&
      levelDb >= this.floorDb(side, band.lowerHz, band.upperHz) + ABOVE_FLOOR_DB;
    const hasNoise = isHeard("outside", outsideDb) && isHeard("inside", insideDb);
    const reason = hasNoise
      ? coherence < LEAST_COHERENCE
        ? "low-coherence"
        : null
      : "too-little-noise";
    return { frequencyHz: band.nominalHz, outsideDb, insideDb, coherence, reason };
  }

  private referenceOf(side: Side): number {
    const { outsidePa, insidePa } = this.options;
    if (outsidePa === null || insidePa === null) return 1;
    return REFERENCE_PRESSURE_PA / (side === "outside" ? outsidePa : insidePa);
  }

  private levelDb(side: Side, square: number): number | null {
    return square > 0 ? 10 * Math.log10(square / this.referenceOf(side) ** 2) : null;
  }

  /** What the samples' own steps make between two frequencies, and a microphone by itself where levels are known. */
  private floorDb(side: Side, lowerHz: number, upperHz: number): number {
    const { step, rateHz, outsidePa, insidePa } = this.options;
    const square = ((step * step) / 12) * ((upperHz - lowerHz) / (rateHz / 2));
    const stepsDb = 10 * Math.log10(square / this.referenceOf(side) ** 2);
    return outsidePa === null || insidePa === null ? stepsDb : Math.max(stepsDb, SELF_NOISE_DB);
  }
}

type Side = "outside" | "inside";

/** Share of a line's own width that lies in a band. */
function shareInBand(lineHz: number, stepHz: number, { lowerHz, upperHz }: Band): number {
  const from = Math.max(lowerHz, lineHz - stepHz / 2);
  const to = Math.min(upperHz, lineHz + stepHz / 2);
  return Math.max(0, to - from) / stepHz;
}

function sumDb(levels: readonly (number | null)[]): number {
  return (
    10 *
    Math.log10(levels.reduce<number>((sum, db) => sum + (db === null ? 0 : 10 ** (db / 10)), 0))
  );
}

/** Nothing above its own floor; or far below the other one, and nothing of it. */
function deadChannel(
  bands: readonly MeasuredBand[],
  floorDb: (side: Side) => number,
): MicrophonePairReading["deadChannel"] {
  const outsideDb = sumDb(bands.map((band) => band.outsideDb));
  const insideDb = sumDb(bands.map((band) => band.insideDb));
  const hasCommon = bands.some(
    ({ coherence }) => coherence !== null && coherence >= LEAST_COHERENCE,
  );
  const isDead = (side: Side, ownDb: number, otherDb: number) =>
    ownDb < floorDb(side) + ABOVE_FLOOR_DB || (!hasCommon && otherDb - ownDb > DEAD_BELOW_DB);
  const outsideIsDead = isDead("outside", outsideDb, insideDb);
  const insideIsDead = isDead("inside", insideDb, outsideDb);
  if (outsideIsDead && insideIsDead) return "both";
  return outsideIsDead ? "outside" : insideIsDead ? "inside" : null;
}
