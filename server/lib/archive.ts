import { createHash } from "node:crypto";
import { createReadStream } from "node:fs";
import { type FileHandle, open, rename, rm, stat } from "node:fs/promises";

/**
 * A backup is one tar file (POSIX ustar), so that it can be looked into with any tar: the entries,
 * then manifest.json with the SHA-256 of each. An archive that was cut short has no manifest.
 */
const BLOCK = 512;
const MANIFEST = "manifest.json";

export interface ArchiveEntry {
  path: string;
  sizeBytes: number;
  sha256: string;
}

export interface Manifest {
  format: 1;
  madeAt: string;
  /** Names of the migrations that the database had run. */
  migrations: string[];
  extensions: string[];
  entries: ArchiveEntry[];
}

/** The archive is not what a backup wrote. */
export class DamagedArchiveError extends Error {}

export interface FoundEntry {
  path: string;
  sizeBytes: number;
  offsetBytes: number;
}

/** Writes beside the target and renames at the end: a file of that name is always a whole backup. */
export async function writeArchive(
  file: string,
  sources: readonly { path: string; file: string }[],
  facts: Omit<Manifest, "format" | "entries">,
): Promise<Manifest> {
  const part = `${file}.part`;
  const handle = await open(part, "w", 0o600);
  try {
    const entries: ArchiveEntry[] = [];
    for (const source of sources) entries.push(await writeFileEntry(handle, source));
    const manifest: Manifest = { format: 1, ...facts, entries };
    const text = Buffer.from(`${JSON.stringify(manifest, null, 2)}\n`);
    await handle.write(header(MANIFEST, text.length));
    await handle.write(text);
    await handle.write(Buffer.alloc(paddingOf(text.length) + 2 * BLOCK));
    await handle.sync();
    await handle.close();
    await rename(part, file);
    return manifest;
  } catch (error) {
    await handle.close().catch(() => undefined);
    await rm(part, { force: true });
    throw error;
  }
}

async function writeFileEntry(
  handle: FileHandle,
  { path, file }: { path: string; file: string },
): Promise<ArchiveEntry> {
  const sizeBytes = (await stat(file)).size;
  await handle.write(header(path, sizeBytes));
  const hash = createHash("sha256");
  let writtenBytes = 0;
  for await (const chunk of createReadStream(file)) {
    hash.update(chunk);
    writtenBytes += chunk.length;
    await handle.write(chunk);
  }
  if (writtenBytes !== sizeBytes) throw new Error(`${file} changed while it was backed up`);
  await handle.write(Buffer.alloc(paddingOf(sizeBytes)));
  return { path, sizeBytes, sha256: hash.digest("hex") };
}

const paddingOf = (sizeBytes: number) => (BLOCK - (sizeBytes % BLOCK)) % BLOCK;

function header(path: string, sizeBytes: number): Buffer {
  const block = Buffer.alloc(BLOCK);
  const { prefix, name } = splitPath(path);
  block.write(name, 0, 100);
  block.write("0000600\0", 100);
  block.write("0000000\0", 108);
  block.write("0000000\0", 116);
  writeSize(block, sizeBytes);
  block.write("00000000000\0", 136);
  block.write("        ", 148); // the checksum counts its own field as spaces
  block.write("0", 156);
  block.write("ustar\x0000", 257);
  block.write(prefix, 345, 155);
  block.write(`${checksum(block).toString(8).padStart(6, "0")}\0 `, 148);
  return block;
}

function splitPath(path: string): { prefix: string; name: string } {
  if (Buffer.byteLength(path) <= 100) return { prefix: "", name: path };
  for (let cut = path.indexOf("/"); cut !== -1; cut = path.indexOf("/", cut + 1)) {
    const prefix = path.slice(0, cut);
    const name = path.slice(cut + 1);
    if (Buffer.byteLength(prefix) <= 155 && Buffer.byteLength(name) <= 100) return { prefix, name };
  }
  throw new RangeError(`the path is too long for a backup: ${path}`);
}

/** Octal up to 8 GiB, above that the binary form that GNU tar reads too. */
function writeSize(block: Buffer, sizeBytes: number): void {
  if (sizeBytes < 8 ** 11) {
    block.write(`${sizeBytes.toString(8).padStart(11, "0")}\0`, 124);
  } else {
    block.writeUInt8(0x80, 124);
    block.writeBigUInt64BE(BigInt(sizeBytes), 128);
  }
}

function checksum(block: Buffer): number {
  const counted = Buffer.from(block);
  counted.fill(" ", 148, 156);
  return counted.reduce((sum, byte) => sum + byte, 0);
}

const textAt = (block: Buffer, from: number, length: number) =>
  block
    .subarray(from, from + length)
    .toString("utf8")
    .split("\0")[0] ?? "";

function sizeAt(block: Buffer): number {
  if ((block[124] ?? 0) & 0x80) return Number(block.readBigUInt64BE(128));
  return Number.parseInt(textAt(block, 124, 12).trim(), 8);
}

async function listEntries(handle: FileHandle): Promise<FoundEntry[]> {
  const entries: FoundEntry[] = [];
  const totalBytes = (await handle.stat()).size;
  let position = 0;
  for (;;) {
    const block = Buffer.alloc(BLOCK);
    const { bytesRead } = await handle.read(block, 0, BLOCK, position);
    if (bytesRead < BLOCK) throw new DamagedArchiveError("it ends too early");
    if (block.every((byte) => byte === 0)) return entries;
    if (Number.parseInt(textAt(block, 148, 8).trim(), 8) !== checksum(block)) {
      throw new DamagedArchiveError("it is not a backup, or a part of it was overwritten");
    }
    const prefix = textAt(block, 345, 155);
    const name = textAt(block, 0, 100);
    const sizeBytes = sizeAt(block);
    const offsetBytes = position + BLOCK;
    if (offsetBytes + sizeBytes > totalBytes) throw new DamagedArchiveError("it ends too early");
    entries.push({ path: prefix ? `${prefix}/${name}` : name, sizeBytes, offsetBytes });
    position = offsetBytes + sizeBytes + paddingOf(sizeBytes);
  }
}

/** The content of one entry. */
export function readEntry(handle: FileHandle, entry: FoundEntry): AsyncIterable<Buffer> {
  if (entry.sizeBytes === 0) return noContent();
  const start = entry.offsetBytes;
  return handle.createReadStream({ start, end: start + entry.sizeBytes - 1, autoClose: false });
}

async function* noContent(): AsyncGenerator<Buffer> {}

/**
 * Reads the whole archive against its manifest.
 *
 * @throws DamagedArchiveError when anything is missing, changed, or points outside its folder.
 */
export async function verifyArchive(
  handle: FileHandle,
): Promise<{ manifest: Manifest; entries: FoundEntry[] }> {
  const found = await listEntries(handle);
  const last = found.pop();
  if (last?.path !== MANIFEST) throw new DamagedArchiveError("it has no manifest");
  const chunks: Buffer[] = [];
  for await (const chunk of readEntry(handle, last)) chunks.push(chunk);
  const manifest = parseManifest(Buffer.concat(chunks).toString("utf8"));
  if (manifest.entries.length !== found.length) {
    throw new DamagedArchiveError("its manifest does not fit its content");
  }
  for (const [index, entry] of found.entries()) {
    const promised = manifest.entries[index];
    if (promised?.path !== entry.path || promised.sizeBytes !== entry.sizeBytes) {
      throw new DamagedArchiveError(`its manifest does not fit its content at ${entry.path}`);
    }
    if (entry.path.split("/").some((step) => step === ".." || step === "" || step.includes("\\"))) {
      throw new DamagedArchiveError(`it names a path outside its folder: ${entry.path}`);
    }
    const hash = createHash("sha256");
    for await (const chunk of readEntry(handle, entry)) hash.update(chunk);
    if (hash.digest("hex") !== promised.sha256) {
      throw new DamagedArchiveError(`${entry.path} is not what was backed up`);
    }
  }
  return { manifest, entries: found };
}

function parseManifest(text: string): Manifest {
  try {
    const manifest = JSON.parse(text) as Manifest;
    if (manifest.format === 1) return manifest;
  } catch {
    throw new DamagedArchiveError("its manifest cannot be read");
  }
  throw new DamagedArchiveError("its manifest is of a format that this version does not know");
}
