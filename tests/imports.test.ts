import { readdirSync, readFileSync } from "node:fs";
import { dirname, join, relative, resolve } from "node:path";
import { describe, expect, test } from "vitest";

const root = resolve(import.meta.dirname, "..");

function filesBelow(folder: string): string[] {
  return readdirSync(join(root, folder), { recursive: true, encoding: "utf8" })
    .filter((name) => /\.tsx?$/.test(name) && !/\.test\.tsx?$/.test(name))
    .map((name) => join(folder, name));
}

interface Import {
  from: string;
  to: string;
}

function importsOf(from: string, text: string): Import[] {
  return [...text.matchAll(/(?:from|import)\s*\(?\s*"([^"\s]+)"/g)].map(([, to = ""]) => ({
    from,
    to: to.startsWith(".") ? relative(root, resolve(root, dirname(from), to)) : to,
  }));
}

const isBelow = (path: string, ...folders: string[]) =>
  folders.some((folder) => path === folder || path.startsWith(`${folder}/`));
const featureOf = (path: string) => /^src\/features\/([^/]+)/.exec(path)?.[1];

/** Why an import goes against the house; null where it does not. */
function breaks({ from, to }: Import): string | null {
  const isPackage = !/^(shared|server|src|migrations|seeders|tests|scripts)\b/.test(to);
  if (isBelow(from, "shared/acoustics")) {
    if (isPackage)
      return to.startsWith("@stdlib/") || to === "fft.js"
        ? null
        : "the arithmetic takes no package but the distributions and the transform";
    return isBelow(to, "shared/acoustics") ? null : "the arithmetic stands alone";
  }
  if (isBelow(from, "shared") && isBelow(to, "server", "src"))
    return "what both sides share knows neither";
  if (isBelow(from, "server") && isBelow(to, "src")) return "the server does not know the client";
  if (isBelow(from, "src") && isBelow(to, "server")) return "the client does not know the server";
  if (isBelow(from, "src/components", "src/lib") && isBelow(to, "src/features", "src/routes"))
    return "components know no feature";
  if (isBelow(from, "src/features")) {
    if (isBelow(to, "src/routes")) return "features meet in routes, not the other way";
    // Who is signed in is everybody's to ask.
    if (featureOf(to) && featureOf(to) !== featureOf(from) && featureOf(to) !== "session")
      return "a feature imports no feature";
  }
  if (
    isBelow(from, "server/queries", "server/models") &&
    isBelow(to, "server/routes", "server/commands")
  )
    return "reads know no changes";
  if (isBelow(from, "server/commands") && isBelow(to, "server/routes"))
    return "commands know no routes";
  return null;
}

describe("imports keep their direction", () => {
  test("in the whole tree", () => {
    const wrong = ["shared", "server", "src"].flatMap(filesBelow).flatMap((file) =>
      importsOf(file, readFileSync(join(root, file), "utf8")).flatMap((one) => {
        const why = breaks(one);
        return why ? [`${one.from} → ${one.to}: ${why}`] : [];
      }),
    );
    expect(wrong).toEqual([]);
  });

  test("a planted violation is caught", () => {
    expect(
      importsOf("src/features/runs/form.tsx", 'import { x } from "../workers/queries";').map(
        breaks,
      ),
    ).toEqual(["a feature imports no feature"]);
    expect(
      importsOf("server/lib/db.ts", 'import { x } from "../../src/lib/api";').map(breaks),
    ).toEqual(["the server does not know the client"]);
    expect(importsOf("shared/acoustics/dose.ts", 'import { z } from "zod";').map(breaks)).toEqual([
      "the arithmetic takes no package but the distributions and the transform",
    ]);
  });

  test("only the configuration reads the environment, and shared code has no clock", () => {
    const offenders = ["server", "shared", "src"].flatMap(filesBelow).filter((file) => {
      const text = readFileSync(join(root, file), "utf8");
      const readsEnvironment = /process\.env/.test(text) && file !== "server/config.ts";
      const hasClock = file.startsWith("shared/") && /Date\.now\(\)|new Date\(\)/.test(text);
      return readsEnvironment || hasClock;
    });
    expect(offenders).toEqual([]);
  });
});
