import { existsSync, mkdtempSync, readdirSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { Readable } from "node:stream";
import { text } from "node:stream/consumers";
import { afterAll, expect, test } from "vitest";
import { openFileStore } from "./file-store";

const folder = mkdtempSync(join(tmpdir(), "dinward-store-"));
const store = openFileStore(folder);
const organization = "00000000-0000-4000-8000-000000000001";
afterAll(() => rmSync(folder, { recursive: true }));

const inStaging = () => readdirSync(join(folder, "staging"));

test("a file is read as it came, before and after it is packed", async () => {
  const content = "06:00:00;84,2\n".repeat(5000);
  const staged = await store.stage(Readable.from([content]), 1e6);
  expect(staged.sizeBytes).toBe(content.length);
  await store.keep(organization, staged);
  expect(inStaging()).toEqual([]);
  expect(await text(store.read(organization, staged.sha256))).toBe(content);

  await store.pack(organization, staged.sha256);
  expect(existsSync(store.pathOf(organization, staged.sha256))).toBe(false);
  expect(await text(store.read(organization, staged.sha256))).toBe(content);
  await store.pack(organization, staged.sha256);

  // The same content again stands beside, to be read in pieces.
  await store.keep(organization, await store.stage(Readable.from([content]), 1e6));
  expect(existsSync(store.pathOf(organization, staged.sha256))).toBe(true);

  await store.remove(organization, staged.sha256);
  await expect(text(store.read(organization, staged.sha256))).rejects.toThrow();
});

test("what is too large or breaks off leaves nothing", async () => {
  await expect(store.stage(Readable.from(["x".repeat(101)]), 100)).rejects.toMatchObject({
    code: "too-large",
  });
  const broken = new Readable({
    read() {
      this.push("half");
      this.destroy(new Error("gone"));
    },
  });
  await expect(store.stage(broken, 100)).rejects.toThrow("gone");
  expect(inStaging()).toEqual([]);
});
