/** From this many samples at full scale in a row a recording counts as clipped there. */
const RUN_SAMPLES = 3;

/** Counts runs of at least three samples at full scale of one sign. */
export class ClipCounter {
  runs = 0;
  samples = 0;
  total = 0;
  private current = 0;
  private sign = 0;

  /**
   * @param highest largest value that the format holds, such as 1 − 2⁻¹⁵
   */
  constructor(private readonly highest: number) {}

  process(block: Float32Array, length: number): void {
    const { highest } = this;
    let { current } = this;
    for (let at = 0; at < length; at++) {
      const value = block[at]!;
      // The lowest number of an integer format reaches one step further down than the highest up.
      if (value < highest && value > -highest) {
        current = 0;
        continue;
      }
      const sign = value > 0 ? 1 : -1;
      current = sign === this.sign ? current + 1 : 1;
      this.sign = sign;
      if (current === RUN_SAMPLES) {
        this.runs++;
        this.samples += RUN_SAMPLES;
      } else if (current > RUN_SAMPLES) this.samples++;
    }
    this.current = current;
    this.total += length;
  }
}
