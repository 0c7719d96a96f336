/** From this many equal samples in a row at the end of a range a recording counts as clipped there. */
const RUN_SAMPLES = 3;
/**
 * How far the sound has to fall beside such a run, as a share of its height and in steps of the format: the rounded top of
 * a slow wave is flat too, and falls from it by a step or two. Common practice, no source.
 */
const FALLS_BY_SHARE = 0.005;
const FALLS_BY_STEPS = 4;
/** Distance of neighbouring numbers in single precision, as a share of them. */
const FLOAT_STEP = 2 ** -23;

/**
 * Counts runs of at least three samples at full scale of one sign; and, where something before the converter was
 * overloaded, as many equal samples at the channel's own largest or smallest value, with steep sides.
 */
export class ClipCounter {
  total = 0;
  private fullRuns = 0;
  private fullSamples = 0;
  private current = 0;
  private sign = 0;
  private previous = 0;
  private readonly top: FlatTop;
  private readonly bottom: FlatTop;

  /**
   * @param highest largest value that the format holds, such as 1 − 2⁻¹⁵
   */
  constructor(private readonly highest: number) {
    this.top = new FlatTop(highest);
    this.bottom = new FlatTop(highest);
  }

  get runs(): number {
    return this.fullRuns + this.top.runs + this.bottom.runs;
  }

  get samples(): number {
    return this.fullSamples + this.top.samples + this.bottom.samples;
  }

  /** Of all samples so far, percent. */
  get sharePct(): number {
    return this.total > 0 ? (100 * this.samples) / this.total : 0;
  }

  process(block: Float32Array, length: number): void {
    const { highest, top, bottom } = this;
    let { current, previous } = this;
    for (let at = 0; at < length; at++) {
      const value = block[at]!;
      if (value >= top.height) top.reach(value, previous);
      else if (top.run > 0) top.leave(value);
      if (-value >= bottom.height) bottom.reach(-value, -previous);
      else if (bottom.run > 0) bottom.leave(-value);
      previous = value;
      // The lowest number of an integer format reaches one step further down than the highest up.
      if (value < highest && value > -highest) {
        current = 0;
        continue;
      }
      const sign = value > 0 ? 1 : -1;
      current = sign === this.sign ? current + 1 : 1;
      this.sign = sign;
      if (current === RUN_SAMPLES) {
        this.fullRuns++;
        this.fullSamples += RUN_SAMPLES;
      } else if (current > RUN_SAMPLES) this.fullSamples++;
    }
    this.current = current;
    this.previous = previous;
    this.total += length;
  }
}

/** Runs at the largest value so far, below full scale: whatever is larger makes an end of what was counted before it. */
class FlatTop {
  height = Number.MIN_VALUE;
  /** Samples of the run that lasts. */
  run = 0;
  private countedRuns = 0;
  private countedSamples = 0;
  private rise = 0;

  constructor(private readonly highest: number) {}

  /** At full scale it is counted as that. */
  get runs(): number {
    return this.height < this.highest ? this.countedRuns : 0;
  }

  get samples(): number {
    return this.height < this.highest ? this.countedSamples : 0;
  }

  reach(value: number, previous: number): void {
    if (value > this.height) {
      this.height = value;
      this.run = 0;
      this.countedRuns = 0;
      this.countedSamples = 0;
    }
    if (this.run === 0) this.rise = value - previous;
    this.run++;
  }

  leave(value: number): void {
    const { height, highest, run, rise } = this;
    this.run = 0;
    if (run < RUN_SAMPLES) return;
    const step = Math.max(1 - highest, height * FLOAT_STEP);
    if (Math.max(rise, height - value) <= Math.max(FALLS_BY_STEPS * step, FALLS_BY_SHARE * height))
      return;
    this.countedRuns++;
    this.countedSamples += run;
  }
}
