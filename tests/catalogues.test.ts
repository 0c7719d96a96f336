import { existsSync, readdirSync, readFileSync } from "node:fs";
import { dirname, join, relative, resolve } from "node:path";
import { describe, expect, test } from "vitest";
import config from "../lingui.config";

const root = resolve(import.meta.dirname, "..");
const folder = join(root, "shared/i18n");

const read = new Map<string, Map<string, string>>();

/** Texts of a catalogue by id. */
function readCatalogue(file: string): Map<string, string> {
  const known = read.get(file);
  if (known) return known;
  const texts = new Map<string, string>();
  read.set(file, texts);
  const text = readFileSync(join(folder, file), "utf8");
  for (const [, id = "", message = ""] of text.matchAll(
    /^msgid ((?:"(?:[^"\\]|\\.)*"\n)+)msgstr ((?:"(?:[^"\\]|\\.)*"\n?)+)/gm,
  )) {
    const join_ = (quoted: string) =>
      quoted
        .trim()
        .split("\n")
        .map((line) => JSON.parse(line) as string)
        .join("");
    if (join_(id) !== "") texts.set(join_(id), join_(message));
  }
  return texts;
}

const partOf = (path: string): string => /i18n\/(\w+)-\{locale\}/.exec(path)?.[1] ?? "";
const toPattern = (glob: string) =>
  new RegExp(
    `^${glob.replace(/[.]/g, "\\.").replace(/\*\*/g, "§").replace(/\*/g, "[^/]*").replace(/§/g, ".*")}$`,
  );
const parts = (config.catalogs ?? []).map(({ path, include, exclude = [] }) => ({
  part: partOf(path),
  patterns: include.map(toPattern),
  without: exclude.map(toPattern),
}));
const partsOf = (file: string) =>
  parts
    .filter(
      ({ patterns, without }) =>
        patterns.some((pattern) => pattern.test(file)) &&
        !without.some((pattern) => pattern.test(file)),
    )
    .map(({ part }) => part);

const sources = ["src", "server", "shared"].flatMap((top) =>
  readdirSync(join(root, top), { recursive: true, encoding: "utf8" })
    .filter(
      (name) => /\.tsx?$/.test(name) && !/\.test\.tsx?$/.test(name) && !name.startsWith("i18n/"),
    )
    .map((name) => join(top, name)),
);
const literal = /(?:i18n\.(?:t|_)\(\s*|\/\*\s*i18n\s*\*\/\s*)("(?:[^"\\]|\\.)*")/g;
const textsIn = (file: string) =>
  [...readFileSync(join(root, file), "utf8").matchAll(literal)].map(
    ([, text = '""']) => JSON.parse(text) as string,
  );

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

describe("catalogues", () => {
  test("every text in the sources has its entry, and every entry its German", () => {
    const wrong: string[] = [];
    for (const file of sources) {
      const [part] = partsOf(file);
      for (const text of textsIn(file)) {
        if (!part) wrong.push(`${file} is in no part: "${text}"`);
        else if (!readCatalogue(`${part}-de.po`).get(text)) wrong.push(`${part}: "${text}"`);
      }
    }
    expect([...new Set(wrong)]).toEqual([]);
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
            if (textsIn(one).length > 0 && !partsOf(one).some((part) => loaded.has(part)))
              missing.push(`${page} shows ${one}`);
          }
        }
      }
    }
    expect([...new Set(missing)]).toEqual([]);
  });
});
