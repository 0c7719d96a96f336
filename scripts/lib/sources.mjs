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
  "seeders",
  "server",
  "shared",
  "src",
  "tailwind.config.ts",
  "tsconfig.json",
  "vite.config.ts",
];

/** Catalogues are compiled from the .po files beside them, so only those are sources. */
const isCompiledCatalogue = (path) => /^shared\/i18n\/(?!index\.)[\w-]+\.ts$/.test(path);
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
