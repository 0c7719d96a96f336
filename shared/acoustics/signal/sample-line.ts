/** Samples that wait their turn: taken in at the end, let go at the front. */
export class SampleLine {
  length = 0;
  private samples = new Float32Array(1 << 16);
  private start = 0;

  push(block: Float32Array): void {
    if (this.start + this.length + block.length > this.samples.length) this.makeRoom(block.length);
    this.samples.set(block, this.start + this.length);
    this.length += block.length;
  }

  drop(count: number): void {
    const gone = Math.min(count, this.length);
    this.start += gone;
    this.length -= gone;
  }

  /** The first so many samples, good until the next `push`. */
  view(count: number): Float32Array {
    return this.samples.subarray(this.start, this.start + Math.min(count, this.length));
  }

  private makeRoom(count: number): void {
    const needed = this.length + count;
    const room = needed > this.samples.length / 2 ? 2 * needed : this.samples.length;
    const samples = room > this.samples.length ? new Float32Array(room) : this.samples;
    samples.set(this.view(this.length), 0);
    this.samples = samples;
    this.start = 0;
  }
}
