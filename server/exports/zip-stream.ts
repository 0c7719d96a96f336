import { createHash } from "node:crypto";
import { Readable, type Writable } from "node:stream";
import { pipeline } from "node:stream/promises";
import { crc32, createDeflateRaw } from "node:zlib";

/** Sizes after the data (bit 3), names in UTF-8 (bit 11). */
const FLAGS = 0x0808;
const DEFLATE = 8;
const VERSION = 20;
/** Of a ZIP whose places are counted in 64 bits. */
const VERSION_64 = 45;
const LARGEST = 0xffff_ffff;
const MOST_FILES = 0xffff;

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
  private readonly whole = createHash("sha256");

  /** @param isLarge the whole may be above 4 GB, which older programs don't read; each of its files may not. */
  constructor(
    private readonly out: Writable,
    madeAt: Date,
    private readonly isLarge = false,
  ) {
    this.dosTime = (madeAt.getUTCHours() << 11) | (madeAt.getUTCMinutes() << 5);
    this.dosDate =
      ((madeAt.getUTCFullYear() - 1980) << 9) |
      ((madeAt.getUTCMonth() + 1) << 5) |
      madeAt.getUTCDate();
  }

  private async write(bytes: Buffer): Promise<void> {
    this.offsetBytes += bytes.length;
    if (this.offsetBytes > LARGEST && !this.isLarge)
      throw new RangeError("the file is too large for this kind of ZIP");
    if (this.out.destroyed) throw new Error("the reader has gone");
    this.whole.update(bytes);
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

  /** @param level of packing, 0 to 9: 0 for what is packed already */
  async add(
    path: string,
    content: AsyncIterable<Buffer> | Iterable<Buffer>,
    level?: number,
  ): Promise<EntryFacts> {
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
      createDeflateRaw({ level }),
      writePacked,
    );
    if (Math.max(entry.sizeBytes, entry.packedBytes) > LARGEST)
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

  /** The list of files, without which it is no ZIP. Gives size and hash of the whole. */
  async end(): Promise<EntryFacts> {
    const begins = this.offsetBytes;
    for (const entry of this.written) await this.write(this.listed(entry));
    const ends = this.offsetBytes;
    if (this.isLarge) await this.write(this.largeEnd(begins, ends));
    const end = Buffer.alloc(22);
    end.writeUInt32LE(0x06054b50, 0);
    end.writeUInt16LE(this.isLarge ? MOST_FILES : this.written.length, 8);
    end.writeUInt16LE(this.isLarge ? MOST_FILES : this.written.length, 10);
    end.writeUInt32LE(this.isLarge ? LARGEST : ends - begins, 12);
    end.writeUInt32LE(this.isLarge ? LARGEST : begins, 16);
    await this.write(end);
    return { sizeBytes: this.offsetBytes, sha256: this.whole.digest("hex") };
  }

  private listed({ path, crc, packedBytes, sizeBytes, offsetBytes }: Written): Buffer {
    const name = Buffer.from(path);
    // Its place in 64 bits (APPNOTE 4.5.3), where the whole may be large.
    const place = Buffer.alloc(this.isLarge ? 12 : 0);
    if (this.isLarge) {
      place.writeUInt16LE(1, 0);
      place.writeUInt16LE(8, 2);
      place.writeBigUInt64LE(BigInt(offsetBytes), 4);
    }
    const head = Buffer.alloc(46);
    head.writeUInt32LE(0x02014b50, 0);
    head.writeUInt16LE(this.isLarge ? VERSION_64 : VERSION, 4);
    head.writeUInt16LE(this.isLarge ? VERSION_64 : VERSION, 6);
    head.writeUInt16LE(FLAGS, 8);
    head.writeUInt16LE(DEFLATE, 10);
    head.writeUInt16LE(this.dosTime, 12);
    head.writeUInt16LE(this.dosDate, 14);
    head.writeUInt32LE(crc, 16);
    head.writeUInt32LE(packedBytes, 20);
    head.writeUInt32LE(sizeBytes, 24);
    head.writeUInt16LE(name.length, 28);
    head.writeUInt16LE(place.length, 30);
    head.writeUInt32LE(this.isLarge ? LARGEST : offsetBytes, 42);
    return Buffer.concat([head, name, place]);
  }

  /** The end in 64 bits and where it is (APPNOTE 4.3.14, 4.3.15). */
  private largeEnd(begins: number, ends: number): Buffer {
    const end = Buffer.alloc(76);
    end.writeUInt32LE(0x06064b50, 0);
    end.writeBigUInt64LE(44n, 4);
    end.writeUInt16LE(VERSION_64, 12);
    end.writeUInt16LE(VERSION_64, 14);
    end.writeBigUInt64LE(BigInt(this.written.length), 24);
    end.writeBigUInt64LE(BigInt(this.written.length), 32);
    end.writeBigUInt64LE(BigInt(ends - begins), 40);
    end.writeBigUInt64LE(BigInt(begins), 48);
    end.writeUInt32LE(0x07064b50, 56);
    end.writeBigUInt64LE(BigInt(ends), 64);
    end.writeUInt32LE(1, 72);
    return end;
  }
}
