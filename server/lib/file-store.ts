import { createHash, randomUUID } from "node:crypto";
import { createReadStream, createWriteStream, existsSync } from "node:fs";
import { mkdir, open, readdir, rename, rm, stat } from "node:fs/promises";
import path from "node:path";
import { type Readable, Transform } from "node:stream";
import { pipeline } from "node:stream/promises";
import { createGunzip, createGzip } from "node:zlib";
import { AppError } from "./errors";

/** A file that has come in and belongs to nobody yet. */
export interface StagedFile {
  readonly path: string;
  readonly sizeBytes: number;
  /** Hex. */
  readonly sha256: string;
}

/** Where files are kept by their content. Another store, of objects, has these. */
export interface FileStore {
  /** Takes a stream in; what is cut off or too large leaves nothing behind. */
  stage(content: NodeJS.ReadableStream, limitBytes: number): Promise<StagedFile>;
  /** Puts a staged file where its content has its place; a second time it is there already. */
  keep(organizationId: string, staged: StagedFile): Promise<void>;
  /** Path of a kept file that is not packed, for those that read it in pieces. */
  pathOf(organizationId: string, sha256: string): string;
  /** Its content as it came, packed or not. */
  read(organizationId: string, sha256: string): Readable;
  /** Compresses a kept file that is only ever read whole. */
  pack(organizationId: string, sha256: string): Promise<void>;
  remove(organizationId: string, sha256: string): Promise<void>;
  /** Takes away what a process that ended left on its way in. */
  sweep(): Promise<void>;
}

/** Nothing is written to for so long and still on its way in, ms. */
const FORGOTTEN_MS = 24 * 60 * 60 * 1000;

const packed = (target: string) => `${target}.gz`;

class FolderStore implements FileStore {
  constructor(readonly folder: string) {}

  async stage(content: NodeJS.ReadableStream, limitBytes: number): Promise<StagedFile> {
    const staging = path.join(this.folder, "staging");
    await mkdir(staging, { recursive: true });
    const target = path.join(staging, randomUUID());
    const hash = createHash("sha256");
    let sizeBytes = 0;
    const measure = new Transform({
      transform(chunk: Buffer, _encoding, done) {
        sizeBytes += chunk.length;
        if (sizeBytes > limitBytes) {
          done(new AppError("too-large", 413, { limitBytes }));
          return;
        }
        hash.update(chunk);
        done(null, chunk);
      },
    });
    try {
      await pipeline(content, measure, createWriteStream(target, { flags: "wx", mode: 0o600 }));
    } catch (error) {
      await rm(target, { force: true });
      throw error;
    }
    return { path: target, sizeBytes, sha256: hash.digest("hex") };
  }

  async keep(organizationId: string, staged: StagedFile): Promise<void> {
    const target = this.pathOf(organizationId, staged.sha256);
    await mkdir(path.dirname(target), { recursive: true });
    if (existsSync(target)) await rm(staged.path, { force: true });
    else await rename(staged.path, target);
  }

  pathOf(organizationId: string, sha256: string): string {
    return path.join(this.folder, "kept", organizationId, sha256.slice(0, 2), sha256);
  }

  read(organizationId: string, sha256: string): Readable {
    const target = this.pathOf(organizationId, sha256);
    return existsSync(packed(target))
      ? createReadStream(packed(target)).pipe(createGunzip())
      : createReadStream(target);
  }

  async pack(organizationId: string, sha256: string): Promise<void> {
    const target = this.pathOf(organizationId, sha256);
    if (!existsSync(target)) return;
    const half = `${target}.${randomUUID()}`;
    try {
      await pipeline(createReadStream(target), createGzip(), createWriteStream(half));
      await rename(half, packed(target));
    } catch (error) {
      await rm(half, { force: true });
      throw error;
    }
    // Whoever has it open reads on to its end.
    await rm(target, { force: true });
  }

  async remove(organizationId: string, sha256: string): Promise<void> {
    const target = this.pathOf(organizationId, sha256);
    await rm(target, { force: true });
    await rm(packed(target), { force: true });
  }

  async sweep(): Promise<void> {
    const staging = path.join(this.folder, "staging");
    for (const name of await readdir(staging).catch(() => [])) {
      const found = await stat(path.join(staging, name)).catch(() => null);
      if (found && found.mtimeMs < Date.now() - FORGOTTEN_MS)
        await rm(path.join(staging, name), { force: true });
    }
  }
}

let instance: FileStore | undefined;

export function openFileStore(folder: string): FileStore {
  instance = new FolderStore(path.resolve(folder));
  return instance;
}

export function fileStore(): FileStore {
  if (!instance) throw new Error("openFileStore() comes first");
  return instance;
}

export async function dropStaged(staged: Pick<StagedFile, "path">): Promise<void> {
  await rm(staged.path, { force: true });
}

const startsWith = (bytes: Buffer, text: string, at = 0) =>
  bytes.subarray(at, at + text.length).toString("latin1") === text;

/** What a file is by its first bytes, whatever its name says. `application/octet-stream`: none of those known here. */
export async function sniffMediaType(file: string): Promise<string> {
  const handle = await open(file, "r");
  try {
    const bytes = Buffer.alloc(512);
    const { bytesRead } = await handle.read(bytes, 0, bytes.length, 0);
    const head = bytes.subarray(0, bytesRead);
    if (startsWith(head, "\x89PNG\r\n\x1a\n")) return "image/png";
    if (head[0] === 0xff && head[1] === 0xd8 && head[2] === 0xff) return "image/jpeg";
    if (startsWith(head, "RIFF") && startsWith(head, "WEBP", 8)) return "image/webp";
    const isSound = ["RIFF", "RF64", "BW64"].some((name) => startsWith(head, name));
    if (isSound && startsWith(head, "WAVE", 8)) return "audio/wav";
    if (startsWith(head, "%PDF-")) return "application/pdf";
    if (startsWith(head, "PK\x03\x04"))
      return "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet";
    const isUtf16 =
      (head[0] === 0xff && head[1] === 0xfe) || (head[0] === 0xfe && head[1] === 0xff);
    const hasControl = head.some((byte) => byte < 9 || (byte > 13 && byte < 32 && byte !== 27));
    return isUtf16 || !hasControl ? "text/plain" : "application/octet-stream";
  } finally {
    await handle.close();
  }
}
