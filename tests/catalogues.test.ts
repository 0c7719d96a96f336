import { existsSync, readdirSync, readFileSync } from "node:fs";
import { dirname, join, relative, resolve } from "node:path";
import { describe, expect, test } from "vitest";
import { partOfSource, textsInSource } from "../scripts/lib/catalogue-parts.mjs";

const root = resolve(import.meta.dirname, "..");
const folder = join(root, "shared/i18n");

const joinLines = (quoted: string) =>
  quoted
    .trim()
    .split("\n")
    .map((line) => JSON.parse(line) as string)
    .join("");

/** Texts of a language by id. */
function readCatalogue(file: string): Map<string, string> {
  const entries = readFileSync(join(folder, file), "utf8").matchAll(
    /^msgid ((?:"(?:[^"\\]|\\.)*"\n)+)msgstr ((?:"(?:[^"\\]|\\.)*"\n?)+)/gm,
  );
  const texts = [...entries].map(
    ([, id = "", message = ""]) => [joinLines(id), joinLines(message)] as const,
  );
  return new Map(texts.filter(([id]) => id !== ""));
}

const sources = ["src", "server", "shared"].flatMap((top) =>
  readdirSync(join(root, top), { recursive: true, encoding: "utf8" })
    .map((name) => join(top, name))
    .filter(
      (name) =>
        /\.tsx?$/.test(name) &&
        !/\.test\.tsx?$/.test(name) &&
        !name.startsWith("shared/i18n/compiled/"),
    ),
);
const textsIn = (file: string) => textsInSource(readFileSync(join(root, file), "utf8"));

function importsOf(file: string): string[] {
  const text = readFileSync(join(root, file), "utf8");
  return [...text.matchAll(/^(?:import|export)(?! type)[^"]*?"(\.[^"]+)"/gm)].flatMap(
    ([, to = ""]) => {
      const path = relative(root, resolve(root, dirname(file), to));
      return [`${path}.ts`, `${path}.tsx`, join(path, "index.ts")].filter((one) =>
        existsSync(join(root, one)),
      );
    },
  );
}

function closure(file: string, seen = new Set<string>()): Set<string> {
  if (seen.has(file)) return seen;
  seen.add(file);
  for (const next of importsOf(file)) closure(next, seen);
  return seen;
}

/** The worker's page, and what reaches a worker by mail or on paper. */
const WORKERS_PARTS: ReadonlySet<string> = new Set(["base", "mail"]);

describe("catalogues", () => {
  test("every text in the sources is in a part", () => {
    expect(sources.filter((file) => textsIn(file).length > 0 && !partOfSource(file))).toEqual([]);
  });

  test("every text in the sources has its German, and no other", () => {
    const german = readCatalogue("de.po");
    const texts = new Set(sources.flatMap(textsIn));
    expect([...texts].filter((text) => !german.get(text))).toEqual([]);
    expect([...german.keys()].filter((text) => !texts.has(text))).toEqual([]);
  });

  test.each(["es", "pl"])("what a worker reads is there in %s", (language) => {
    const words = readCatalogue(`${language}.po`);
    const texts = sources
      .filter((file) => WORKERS_PARTS.has(partOfSource(file) ?? ""))
      .flatMap(textsIn);
    expect([...new Set(texts)].filter((text) => !words.get(text))).toEqual([]);
  });

  test("a page loads the words of everything it shows", () => {
    const router = ["src/router.tsx", "src/routes/desk-pages.tsx"]
      .map((file) => readFileSync(join(root, file), "utf8"))
      .join("\n");
    const groups = new Map(
      [...router.matchAll(/withWords\(\s*i18n,\s*\[([^\]]+)\],\s*(\w+),/g)].map(
        ([, loaded = "", name = ""]) => [name, loaded.match(/\w+/g) ?? []],
      ),
    );
    expect(groups.size).toBe(6);
    const missing: string[] = [];
    for (const file of readdirSync(join(root, "src/routes")).filter((name) =>
      name.endsWith("-routes.ts"),
    )) {
      const text = readFileSync(join(root, "src/routes", file), "utf8");
      for (const [, name = "", body = ""] of text.matchAll(
        /export const (\w+): PageRoute\[\] = \[([\s\S]*?)\];/g,
      )) {
        const loaded = new Set(["base", ...(groups.get(name) ?? [])]);
        for (const [, page = ""] of body.matchAll(/import\("\.\/([\w-]+)"\)/g)) {
          for (const one of closure(`src/routes/${page}.tsx`)) {
            // Rule sets come along for their numbers; pages that show their labels load "rules".
            if (one.startsWith("shared/rule-sets/")) continue;
            if (textsIn(one).length > 0 && !loaded.has(partOfSource(one) ?? ""))
              missing.push(`${page} shows ${one}`);
          }
        }
      }
    }
    expect([...new Set(missing)]).toEqual([]);
  });
});
