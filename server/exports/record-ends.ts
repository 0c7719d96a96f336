import { Transform, type TransformCallback } from "node:stream";

const LF = 0x0a;
const CR = 0x0d;
const QUOTE = 0x22;

/**
 * Ends the records of a database's CSV with CR LF, as RFC 4180 has it, and counts them. A line break inside a quoted
 * field is part of the text and stays.
 */
export class RecordEnds extends Transform {
  /** Records so far, the header included. */
  count = 0;
  private isQuoted = false;

  override _transform(chunk: Buffer, _encoding: string, done: TransformCallback): void {
    done(null, this.isQuoted || chunk.includes(QUOTE) ? this.withQuotes(chunk) : this.plain(chunk));
  }

  /** Most chunks: nothing is quoted, every LF ends a record. */
  private plain(chunk: Buffer): Buffer {
    let ends = 0;
    for (let at = chunk.indexOf(LF); at >= 0; at = chunk.indexOf(LF, at + 1)) ends += 1;
    const out = Buffer.allocUnsafe(chunk.length + ends);
    let from = 0;
    let to = 0;
    for (let at = chunk.indexOf(LF); at >= 0; at = chunk.indexOf(LF, from)) {
      to += chunk.copy(out, to, from, at);
      out[to++] = CR;
      out[to++] = LF;
      from = at + 1;
    }
    chunk.copy(out, to, from);
    this.count += ends;
    return out;
  }

  private withQuotes(chunk: Buffer): Buffer {
    const out = Buffer.allocUnsafe(2 * chunk.length);
    let to = 0;
    for (const byte of chunk) {
      if (byte === QUOTE) this.isQuoted = !this.isQuoted;
      if (byte === LF && !this.isQuoted) {
        out[to++] = CR;
        this.count += 1;
      }
      out[to++] = byte;
    }
    return out.subarray(0, to);
  }
}
