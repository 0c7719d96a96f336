import { readdirSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, test } from "vitest";
import { SOURCES } from "./sources";

const folder = import.meta.dirname;
const files = readdirSync(folder, { recursive: true, encoding: "utf8" }).filter(
  (name) => name.endsWith(".ts") && !name.endsWith(".test.ts"),
);
const cited = files.flatMap((name) =>
  [...readFileSync(join(folder, name), "utf8").matchAll(/@source ([\w.-]+)/g)].map(
    ([, id]) => [name, id ?? ""] as const,
  ),
);

describe("sources", () => {
  test.each(cited)("%s cites %s, which is entered", (_name, id) => {
    expect(Object.keys(SOURCES)).toContain(id);
  });

  test("none is entered that nothing cites", () => {
    const used = new Set(cited.map(([, id]) => id));
    expect(Object.keys(SOURCES).filter((id) => !used.has(id))).toEqual([]);
  });
});
