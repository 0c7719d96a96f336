import { execFile } from "node:child_process";
import { mkdtemp, open, readFile, rm, truncate, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import path from "node:path";
import { promisify } from "node:util";
import { afterEach, beforeEach, expect, test } from "vitest";
import { readEntry, verifyArchive, writeArchive } from "./archive";

let folder: string;
let archive: string;
const longPath = `files/${"a".repeat(60)}/${"b".repeat(90)}`;

beforeEach(async () => {
  folder = await mkdtemp(path.join(tmpdir(), "dinward-archive-"));
  archive = path.join(folder, "backup.tar");
  await writeFile(path.join(folder, "one"), "first content");
  await writeFile(path.join(folder, "two"), Buffer.alloc(1500, 7));
  await writeFile(path.join(folder, "none"), "");
  await writeArchive(
    archive,
    [
      { path: "database.dump", file: path.join(folder, "one") },
      { path: longPath, file: path.join(folder, "two") },
      { path: "files/empty", file: path.join(folder, "none") },
    ],
    { madeAt: "2026-09-01T10:00:00.000Z", migrations: ["m1"], extensions: ["pgcrypto"] },
  );
});

afterEach(() => rm(folder, { recursive: true }));

async function verify() {
  const handle = await open(archive);
  try {
    return await verifyArchive(handle);
  } finally {
    await handle.close();
  }
}

async function overwrite(atByte: number, text: string) {
  const handle = await open(archive, "r+");
  await handle.write(text, atByte);
  await handle.close();
}

test("what was written is found, with the SHA-256 that FIPS 180-4 gives for no content", async () => {
  const { manifest, entries } = await verify();
  expect(entries.map((entry) => entry.path)).toEqual(["database.dump", longPath, "files/empty"]);
  expect(manifest).toMatchObject({ migrations: ["m1"], extensions: ["pgcrypto"] });
  expect(manifest.entries[2]?.sha256).toBe(
    "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855",
  );
  const handle = await open(archive);
  const chunks: Buffer[] = [];
  for await (const chunk of readEntry(handle, entries[1]!)) chunks.push(chunk);
  await handle.close();
  expect(Buffer.concat(chunks)).toEqual(await readFile(path.join(folder, "two")));
});

test("any tar reads it", async () => {
  const { stdout } = await promisify(execFile)("tar", ["-tf", archive]);
  expect(stdout.trim().split("\n")).toEqual([
    "database.dump",
    longPath,
    "files/empty",
    "manifest.json",
  ]);
});

test("one changed byte is noticed, and where", async () => {
  await overwrite(512, "F");
  await expect(verify()).rejects.toThrow("database.dump is not what was backed up");
});

test("a header that was overwritten is noticed", async () => {
  await overwrite(0, "../../etc");
  await expect(verify()).rejects.toThrow("overwritten");
});

test("an archive that was cut short is noticed", async () => {
  await truncate(archive, 2048);
  await expect(verify()).rejects.toThrow("ends too early");
});

test("another kind of file is no backup", async () => {
  await writeFile(archive, "x".repeat(4096));
  await expect(verify()).rejects.toThrow("not a backup");
});

test("a path that leads out of the folder is refused", async () => {
  await writeArchive(archive, [{ path: "files/../../x", file: path.join(folder, "one") }], {
    madeAt: "2026-09-01T10:00:00.000Z",
    migrations: [],
    extensions: [],
  });
  await expect(verify()).rejects.toThrow("outside its folder");
});

test("a path too long for the format is said, and no half archive stays", async () => {
  const target = path.join(folder, "other.tar");
  const source = { path: "x".repeat(101), file: path.join(folder, "one") };
  const facts = { madeAt: "2026-09-01T10:00:00.000Z", migrations: [], extensions: [] };
  await expect(writeArchive(target, [source], facts)).rejects.toThrow(RangeError);
  await expect(open(target)).rejects.toThrow("ENOENT");
  await expect(open(`${target}.part`)).rejects.toThrow("ENOENT");
});
