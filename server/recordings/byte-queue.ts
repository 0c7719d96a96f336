/** Takes bytes off a stream in the pieces that a reader wants, without gathering more than one such piece. */
export class ByteQueue {
  taken = 0;
  private readonly iterator: AsyncIterator<Uint8Array>;
  private chunk: Uint8Array = new Uint8Array(0);
  private joined = new Uint8Array(0);

  constructor(source: AsyncIterable<Uint8Array>) {
    this.iterator = source[Symbol.asyncIterator]();
  }

  /** That many bytes, or null where the stream ends before. They are good until the next call. */
  async take(count: number): Promise<Uint8Array | null> {
    const bytes = await this.takeUpTo(count);
    return bytes.length < count ? null : bytes;
  }

  /** That many bytes, or as many as are left. They are good until the next call. */
  async takeUpTo(count: number): Promise<Uint8Array> {
    if (this.chunk.length === 0) await this.advance();
    if (this.chunk.length >= count) return this.cut(count);
    if (this.joined.length < count) this.joined = new Uint8Array(count);
    let filled = 0;
    while (filled < count && (this.chunk.length > 0 || (await this.advance()))) {
      const piece = this.cut(Math.min(count - filled, this.chunk.length));
      this.joined.set(piece, filled);
      filled += piece.length;
    }
    return this.joined.subarray(0, filled);
  }

  /** The next bytes, as many as are left of that many, without taking them. They are good until the next call. */
  async peek(count: number): Promise<Uint8Array> {
    while (this.chunk.length < count) {
      const held = this.chunk;
      if (!(await this.advance())) break;
      const joined = new Uint8Array(held.length + this.chunk.length);
      joined.set(held);
      joined.set(this.chunk, held.length);
      this.chunk = joined;
    }
    return this.chunk.subarray(0, count);
  }

  async skip(count: number): Promise<void> {
    let left = count;
    while (left > 0 && (this.chunk.length > 0 || (await this.advance())))
      left -= this.cut(Math.min(left, this.chunk.length)).length;
  }

  private cut(count: number): Uint8Array {
    const piece = this.chunk.subarray(0, count);
    this.chunk = this.chunk.subarray(count);
    this.taken += count;
    return piece;
  }

  private async advance(): Promise<boolean> {
    for (;;) {
      const { value, done } = await this.iterator.next();
      if (done) return false;
      if (value.length > 0) {
        this.chunk = value;
        return true;
      }
    }
  }
}
