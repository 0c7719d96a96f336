import { createHash } from "node:crypto";
import { Readable, type Writable } from "node:stream";
import { pipeline } from "node:stream/promises";
import { crc32, createDeflateRaw } from "node:zlib";

/** Sizes after the data (bit 3), names in UTF-8 (bit 11). */
const FLAGS = 0x0808;
const DEFLATE = 8;
const VERSION = 20;
const LARGEST = 0xffff_ffff;

interface Written {
  path: string;
  crc: number;
  packedBytes: number;
  sizeBytes: number;
  offsetBytes: number;
}

export interface EntryFacts {
  sizeBytes: number;
  sha256: string;
}

/**
 * Writes a ZIP while its files are being made: no file is held in memory, none has to be known in length. Until `end` there
 * is no list of files at its end, so that one which broke off is none.
 */
export class ZipStream {
  private offsetBytes = 0;
  private readonly written: Written[] = [];
  private readonly dosTime: number;
  private readonly dosDate: number;

  constructor(
    private readonly out: Writable,
    madeAt: Date,
  ) {
    this.dosTime = (madeAt.getUTCHours() << 11) | (madeAt.getUTCMinutes() << 5);
    this.dosDate =
      ((madeAt.getUTCFullYear() - 1980) << 9) |
      ((madeAt.getUTCMonth() + 1) << 5) |
      madeAt.getUTCDate();
  }

  private async write(bytes: Buffer): Promise<void> {
    this.offsetBytes += bytes.length;
    if (this.offsetBytes > LARGEST)
      throw new RangeError("the file is too large for this kind of ZIP");
    if (this.out.destroyed) throw new Error("the reader has gone");
    if (this.out.write(bytes)) return;
    // A reader that goes away drains nothing any more.
    await new Promise<void>((resolve) => {
      const goOn = () => {
        this.out.off("drain", goOn).off("close", goOn);
        resolve();
      };
      this.out.on("drain", goOn).on("close", goOn);
    });
  }

  async add(path: string, content: AsyncIterable<Buffer> | Iterable<Buffer>): Promise<EntryFacts> {
    const name = Buffer.from(path);
    const entry: Written = {
      path,
      crc: 0,
      packedBytes: 0,
      sizeBytes: 0,
      offsetBytes: this.offsetBytes,
    };
    const head = Buffer.alloc(30);
    head.writeUInt32LE(0x04034b50, 0);
    head.writeUInt16LE(VERSION, 4);
    head.writeUInt16LE(FLAGS, 6);
    head.writeUInt16LE(DEFLATE, 8);
    head.writeUInt16LE(this.dosTime, 10);
    head.writeUInt16LE(this.dosDate, 12);
    head.writeUInt16LE(name.length, 26);
    await this.write(Buffer.concat([head, name]));
    const hash = createHash("sha256");
    const counted = async function* () {
      for await (const piece of content) {
        hash.update(piece);
        entry.crc = crc32(piece, entry.crc);
        entry.sizeBytes += piece.length;
        yield piece;
      }
    };
    const writePacked = async (pieces: AsyncIterable<Buffer>) => {
      for await (const piece of pieces) {
        entry.packedBytes += piece.length;
        await this.write(piece);
      }
    };
    await pipeline(
      Readable.from(counted(), { objectMode: false }),
      createDeflateRaw(),
      writePacked,
    );
    if (entry.sizeBytes > LARGEST)
      throw new RangeError(`${path} is too large for this kind of ZIP`);
    const sizes = Buffer.alloc(16);
    sizes.writeUInt32LE(0x08074b50, 0);
    sizes.writeUInt32LE(entry.crc, 4);
    sizes.writeUInt32LE(entry.packedBytes, 8);
    sizes.writeUInt32LE(entry.sizeBytes, 12);
    await this.write(sizes);
    this.written.push(entry);
    return { sizeBytes: entry.sizeBytes, sha256: hash.digest("hex") };
  }

  /** The list of files, without which it is no ZIP. */
  async end(): Promise<void> {
    const begins = this.offsetBytes;
    for (const { path, crc, packedBytes, sizeBytes, offsetBytes } of this.written) {
      const name = Buffer.from(path);
      const head = Buffer.alloc(46);
      head.writeUInt32LE(0x02014b50, 0);
      head.writeUInt16LE(VERSION, 4);
      head.writeUInt16LE(VERSION, 6);
      head.writeUInt16LE(FLAGS, 8);
      head.writeUInt16LE(DEFLATE, 10);
      head.writeUInt16LE(this.dosTime, 12);
      head.writeUInt16LE(this.dosDate, 14);
      head.writeUInt32LE(crc, 16);
      head.writeUInt32LE(packedBytes, 20);
      head.writeUInt32LE(sizeBytes, 24);
      head.writeUInt16LE(name.length, 28);
      head.writeUInt32LE(offsetBytes, 42);
      await this.write(Buffer.concat([head, name]));
    }
    const end = Buffer.alloc(22);
    end.writeUInt32LE(0x06054b50, 0);
    end.writeUInt16LE(this.written.length, 8);
    end.writeUInt16LE(this.written.length, 10);
    end.writeUInt32LE(this.offsetBytes - begins, 12);
    end.writeUInt32LE(begins, 16);
    await this.write(end);
  }
}
