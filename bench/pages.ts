import { readFileSync } from "node:fs";
import { join } from "node:path";
import { gzipSync } from "node:zlib";
import { title } from "./lib/measure";

interface Chunk {
  file: string;
  imports?: string[];
}

const client = join(import.meta.dirname, "../dist/client");
const manifest: Record<string, Chunk> = JSON.parse(
  readFileSync(join(client, ".vite/manifest.json"), "utf8"),
);

/** Scripts that have to be there before a page is. */
function scriptsOf(entries: readonly string[], found = new Set<string>()): Set<string> {
  for (const entry of entries) {
    const chunk = manifest[entry];
    if (!chunk || found.has(chunk.file)) continue;
    found.add(chunk.file);
    scriptsOf(chunk.imports ?? [], found);
  }
  return found;
}

const words = ["shared/i18n/compiled/base-en.ts", "shared/i18n/compiled/office-en.ts"];
const firstPages: [role: string, page: string, words: string[], goalKb: number][] = [
  ["before sign-in", "sign-in", words.slice(0, 1), 180],
  ["officer", "waiting-page", words, 180],
  ["supervisor", "crew-sheet-page", words, 180],
  ["auditor", "year-file-page", words, 180],
  ["administrator", "people-page", words, 180],
  ["worker", "me-page", words.slice(0, 1), 130],
];

title("JavaScript of each role's first page, gzipped");
for (const [role, page, catalogues, goalKb] of firstPages) {
  const entry = `src/routes/${page}.tsx`;
  for (const part of [entry, ...catalogues])
    if (!manifest[part]) throw new Error(`the build has no ${part}`);
  const scripts = [...scriptsOf(["index.html", entry, ...catalogues])].filter((file) =>
    file.endsWith(".js"),
  );
  const bytes = scripts.reduce(
    (sum, file) => sum + gzipSync(readFileSync(join(client, file)), { level: 9 }).length,
    0,
  );
  console.log(
    `  ${role}: ${(bytes / 1000).toFixed(1)} kB in ${scripts.length} files; × ${(bytes / 1000 / goalKb).toFixed(2)} of ${goalKb} kB`,
  );
}
