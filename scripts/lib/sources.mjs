import { createHash } from "node:crypto";
import { existsSync, readdirSync, readFileSync, statSync } from "node:fs";
import { join, relative } from "node:path";
import { projectFolder } from "./project.mjs";

const SOURCES = [
  "index.html",
  "lingui.config.ts",
  "migrations",
  "package-lock.json",
  "public",
  "scripts/build.mjs",
  "scripts/lib/catalogue-parts.mjs",
  "seeders",
  "server",
  "shared",
  "src",
  "tailwind.config.ts",
  "tsconfig.json",
  "vite.config.ts",
];

/** Catalogues are compiled from the .po files and the texts in the sources. */
const isCompiledCatalogue = (path) => path.startsWith("shared/i18n/compiled/");
const isTest = (path) => /\.test\.tsx?$/.test(path);

function listFiles(path) {
  if (!existsSync(path)) return [];
  if (!statSync(path).isDirectory()) return [path];
  return readdirSync(path)
    .sort()
    .flatMap((name) => listFiles(join(path, name)));
}

/** One hash over everything that a build is made from. */
export function hashSources() {
  const hash = createHash("sha256");
  for (const source of SOURCES) {
    for (const file of listFiles(join(projectFolder, source))) {
      const path = relative(projectFolder, file).replaceAll("\\", "/");
      if (isTest(path) || isCompiledCatalogue(path)) continue;
      hash.update(`${path}\0`).update(readFileSync(file)).update("\0");
    }
  }
  return hash.digest("hex");
}
