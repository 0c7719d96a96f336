import { readdirSync, readFileSync } from "node:fs";
import path from "node:path";
import { expect, test } from "vitest";
import { actionWord, SUBJECT_KINDS, subjectWord } from "../src/features/trail/trail-words";
import { testI18n } from "../src/lib/test-i18n";

/** Every event that the server writes, read from its own text. */
const server = path.join(import.meta.dirname, "../server");
const source = readdirSync(server, { recursive: true, encoding: "utf8" })
  .filter((name) => name.endsWith(".ts") && !name.endsWith(".test.ts"))
  .map((name) => readFileSync(path.join(server, name), "utf8"))
  .filter((text) => text.includes("recordAudit"))
  .join("\n");
const inSource = (pattern: RegExp) =>
  new Set([...source.matchAll(pattern)].map(([, word = ""]) => word));

test("every kind of thing that an event is about has its word, and can be chosen", () => {
  const kinds = inSource(/subjectKind: "([a-z-]+)"/g);
  expect(kinds.size).toBeGreaterThan(15);
  expect([...kinds].filter((kind) => subjectWord(testI18n(), kind) === kind)).toEqual([]);
  expect([...kinds].filter((kind) => !SUBJECT_KINDS.some((known) => known === kind))).toEqual([]);
});

test("every action has its word", () => {
  const actions = inSource(/action: (?:\w+(?:\.\w+)? \? )?"([a-z-]+)"/g);
  expect(actions.size).toBeGreaterThan(60);
  expect([...actions].filter((action) => actionWord(testI18n(), action) === action)).toEqual([]);
});
