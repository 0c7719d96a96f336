import { OCTAVE_BANDS_HZ, type OctaveBandValues } from "../types";
import { ClipCounter } from "./clipping";
import { FilterBank } from "./filter-bank";
import { type Band, bandFits, OCTAVE_BANDS } from "./third-octave";
import { WeightedLevels } from "./weighted-levels";

/** Rates for which filters and weightings are proven, Hz. */
export const SAMPLE_RATES_HZ = [44_100, 48_000, 88_200, 96_000, 176_400, 192_000] as const;

const REFERENCE_PRESSURE_PA = 20e-6;
const BLOCK = 4096;
/** Silence after the end in which the lowest band rings out, seconds: its energy belongs to the recording. */
const RING_OUT_S = 1;

export interface SoundOptions {
  readonly rateHz: number;
  readonly channels: number;
  /** Sound pressure at full scale by channel; null where it is not known: such a channel has relative levels only. */
  readonly paPerFullScale: readonly (number | null)[];
  /** Whether band levels are wanted; they take most of the time. */
  readonly bands: boolean;
  /** Largest value that the samples' format holds; 1 for floating point. */
  readonly fullScale?: number;
}

export interface BandLevel {
  readonly nominalHz: number;
  /** Null where there was nothing in the band. */
  readonly levelDb: number | null;
}

export interface SoundLevels {
  /** Absolute: dB re 20 µPa. Relative: dB re a full-scale value of 1, good for differences and spectra only. */
  readonly reference: "absolute" | "relative";
  readonly durationS: number;
  /** Null: nothing but zeros. */
  readonly laeqDb: number | null;
  readonly lceqDb: number | null;
  readonly lzeqDb: number | null;
  readonly lcMinusLaDb: number | null;
  readonly lcPeakDb: number | null;
  readonly lafMaxDb: number | null;
  readonly lasMaxDb: number | null;
  /** Unweighted, 31.5 Hz to 8 or 16 kHz as the rate allows; null where bands were not asked for. */
  readonly octaveBandsDb: readonly BandLevel[] | null;
  /** Unweighted, 25 Hz to 16 or 20 kHz as the rate allows. */
  readonly thirdOctaveBandsDb: readonly BandLevel[] | null;
  readonly history: {
    /** One value a whole second; what is left over at the end has none. */
    readonly laeq1sDb: readonly (number | null)[];
    /** Slow level at the end of each second. */
    readonly las1sDb: readonly (number | null)[];
  };
  readonly clipping: {
    readonly runs: number;
    readonly samples: number;
    readonly sharePct: number;
  };
}

export interface SoundAnalysis {
  /** Takes a block: one array per channel, all of one length, of any length. They may be used again afterwards. */
  feed(channels: readonly Float32Array[]): void;
  /** Levels by channel. Nothing can be fed afterwards. */
  finish(): SoundLevels[];
}

/**
 * Levels and spectra of a sound that is fed block by block: memory does not grow with it, but for 16 bytes per second
 * and channel of history.
 *
 * LAeq, LCeq, LZeq, LCpeak (between samples too), LAFmax and LASmax with class 1 weightings; third-octave levels with
 * class 1 filters, octave levels as the energy sum of their three third-octaves, whose response together is inside
 * class 1 of the octave filter. Band levels hold the whole energy, what rings on after the end included.
 *
 * @throws RangeError when rate, channels or sensitivities are not what the filters are made for.
 * @source iec-61672-1 5
 * @source iec-61260-1 5
 */
export function analyseSound(options: SoundOptions): SoundAnalysis {
  const { rateHz, channels, paPerFullScale, bands, fullScale = 1 } = options;
  if (!(SAMPLE_RATES_HZ as readonly number[]).includes(rateHz))
    throw new RangeError(`no filters for ${rateHz} Hz`);
  if (paPerFullScale.length !== channels)
    throw new RangeError("one sensitivity per channel, or null");
  if (paPerFullScale.some((value) => value !== null && !(value > 0 && value < Infinity)))
    throw new RangeError("a sensitivity is a positive number of pascals");
  const analyses = Array.from(
    { length: channels },
    (_, index) => new ChannelAnalysis(rateHz, paPerFullScale[index]!, bands, fullScale),
  );
  let isFinished = false;
  return {
    feed(blocks) {
      if (isFinished) throw new RangeError("the analysis is finished");
      if (blocks.length !== channels) throw new RangeError(`${channels} channels expected`);
      if (blocks.some(({ length }) => length !== blocks[0]!.length))
        throw new RangeError("channels of one length expected");
      for (const [index, block] of blocks.entries()) analyses[index]!.feed(block);
    },
    finish() {
      if (isFinished) throw new RangeError("the analysis is finished");
      isFinished = true;
      return analyses.map((analysis) => analysis.finish());
    },
  };
}

class ChannelAnalysis {
  private readonly weighted: WeightedLevels;
  private readonly bank: FilterBank | null;
  private readonly clips: ClipCounter;
  private readonly pending = new Float32Array(BLOCK);
  private readonly unweighted = new Float64Array(BLOCK);
  private pendingLength = 0;

  constructor(
    private readonly rateHz: number,
    private readonly paPerFullScale: number | null,
    hasBands: boolean,
    fullScale: number,
  ) {
    this.weighted = new WeightedLevels(rateHz, BLOCK);
    this.bank = hasBands ? new FilterBank(rateHz, BLOCK) : null;
    this.clips = new ClipCounter(fullScale);
  }

  feed(block: Float32Array): void {
    for (let from = 0; from < block.length; ) {
      const to = Math.min(block.length, from + BLOCK - this.pendingLength);
      this.pending.set(block.subarray(from, to), this.pendingLength);
      this.pendingLength += to - from;
      from = to;
      if (this.pendingLength === BLOCK) this.processPending();
    }
  }

  finish(): SoundLevels {
    const { weighted, bank, rateHz } = this;
    this.processPending();
    weighted.finish();
    this.unweighted.fill(0);
    for (let rest = RING_OUT_S * rateHz; bank && rest > 0; rest -= BLOCK)
      bank.process(this.unweighted);
    const { samples } = weighted;
    const levelOf = (square: number) => this.levelDb(square);
    const levelOfEnergy = (energy: number) => (samples > 0 ? levelOf(energy / samples) : null);
    const laeqDb = levelOfEnergy(weighted.aEnergy);
    const lceqDb = levelOfEnergy(weighted.cEnergy);
    return {
      reference: this.paPerFullScale === null ? "relative" : "absolute",
      durationS: samples / rateHz,
      laeqDb,
      lceqDb,
      lzeqDb: levelOfEnergy(weighted.zEnergy),
      lcMinusLaDb: laeqDb === null || lceqDb === null ? null : lceqDb - laeqDb,
      lcPeakDb: levelOf(weighted.cPeak ** 2),
      lafMaxDb: levelOf(weighted.fastMax),
      lasMaxDb: levelOf(weighted.slowMax),
      octaveBandsDb:
        bank &&
        OCTAVE_BANDS.filter((band) => bandFits(band, rateHz)).map((octave) => ({
          nominalHz: octave.nominalHz,
          levelDb: levelOfEnergy(octaveEnergy(octave, bank)),
        })),
      thirdOctaveBandsDb:
        bank?.bands.map(({ nominalHz }, index) => ({
          nominalHz,
          levelDb: levelOfEnergy(bank.energies[index]!),
        })) ?? null,
      history: {
        laeq1sDb: weighted.secondsEqual.map(levelOf),
        las1sDb: weighted.secondsSlow.map(levelOf),
      },
      clipping: {
        runs: this.clips.runs,
        samples: this.clips.samples,
        sharePct: this.clips.sharePct,
      },
    };
  }

  private processPending(): void {
    const length = this.pendingLength;
    this.pendingLength = 0;
    this.weighted.process(this.pending, length, this.unweighted);
    this.clips.process(this.pending, length);
    this.unweighted.fill(0, length);
    this.bank?.process(this.unweighted);
  }

  private levelDb(square: number): number | null {
    if (!(square > 0)) return null;
    const reference = this.paPerFullScale ? REFERENCE_PRESSURE_PA / this.paPerFullScale : 1;
    return 10 * Math.log10(square) - 20 * Math.log10(reference);
  }
}

/** The third-octaves of an octave are those whose exact mid frequency lies inside it. */
function octaveEnergy(octave: Band, bank: FilterBank): number {
  return bank.bands.reduce(
    (sum, { midHz }, index) =>
      midHz > octave.lowerHz && midHz < octave.upperHz ? sum + bank.energies[index]! : sum,
    0,
  );
}

/** The octave levels that the protector methods take, 63 Hz to 8 kHz; null where one but the first is missing. */
export function octaveBandValues(levels: readonly BandLevel[]): OctaveBandValues | null {
  const [b63, b125, b250, b500, b1k, b2k, b4k, b8k] = OCTAVE_BANDS_HZ.map(
    (bandHz) => levels.find(({ nominalHz }) => nominalHz === bandHz)?.levelDb ?? null,
  );
  if (b125 == null || b250 == null || b500 == null || b1k == null) return null;
  if (b2k == null || b4k == null || b8k == null) return null;
  return [b63 ?? null, b125, b250, b500, b1k, b2k, b4k, b8k];
}
