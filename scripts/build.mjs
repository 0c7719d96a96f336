/**
 * npm run build.
 * Builds the client to dist/client and each server entry point to one file in dist/server.
 * With --if-changed it does nothing when the sources are those of the last build; the bundlers are
 * loaded only where there is something to do, for that takes longer than the rest.
 */
import { existsSync, mkdirSync, readFileSync, renameSync, rmSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { compileCatalogues } from "./lib/catalogues.mjs";
import { bundleCheckPage } from "./lib/check-page.mjs";
import { runMain } from "./lib/failure.mjs";
import { withLock } from "./lib/lock.mjs";
import { lockFolder, projectFolder } from "./lib/project.mjs";
import { hashSources } from "./lib/sources.mjs";

const entryPoints = [
  "web",
  "work",
  "migrate",
  "setup",
  "seed-demo",
  "backup",
  "restore",
  "verify-trail",
];
/** What runs in threads, each a file beside the entry points (server/lib/run-worker.ts). */
const threads = {
  "history-worker": "histories/history-worker",
  "analyse-worker": "recordings/analyse-worker",
  "pair-worker": "recordings/pair-worker",
  "timetable-worker": "timetables/timetable-worker",
};
const dist = join(projectFolder, "dist");
const recordFile = join(dist, "build.json");

function isCurrent(sourcesHash) {
  if (!existsSync(recordFile)) return false;
  return JSON.parse(readFileSync(recordFile, "utf8")).sourcesHash === sourcesHash;
}

async function bundleServer(folder) {
  const { build: bundle } = await import("esbuild");
  await bundle({
    absWorkingDir: projectFolder,
    // One file each, not shared chunks: code that looks for files beside itself finds dist/server.
    entryPoints: Object.fromEntries([
      ...entryPoints.map((name) => [name, `server/${name}.ts`]),
      ...Object.entries(threads).map(([name, file]) => [name, `server/${file}.ts`]),
    ]),
    outdir: folder,
    bundle: true,
    packages: "external",
    platform: "node",
    format: "esm",
    target: "node20",
    sourcemap: true,
    logLevel: "warning",
  });
  writeFileSync(join(folder, "check.html"), await bundleCheckPage());
}

async function bundleClient(folder) {
  const { build: bundle } = await import("vite");
  await bundle({
    root: projectFolder,
    configFile: join(projectFolder, "vite.config.ts"),
    logLevel: "warn",
    build: { outDir: folder, emptyOutDir: true },
  });
}

async function build() {
  const sourcesHash = hashSources();
  if (process.argv.includes("--if-changed") && isCurrent(sourcesHash)) return;
  await compileCatalogues();
  const fresh = join(dist, "new");
  rmSync(fresh, { recursive: true, force: true });
  mkdirSync(fresh, { recursive: true });
  await Promise.all([bundleServer(join(fresh, "server")), bundleClient(join(fresh, "client"))]);
  // Swapped in when whole: a process that serves the old build never sees half of the new one.
  rmSync(recordFile, { force: true });
  for (const part of ["client", "server"]) {
    rmSync(join(dist, part), { recursive: true, force: true });
    renameSync(join(fresh, part), join(dist, part));
  }
  rmSync(fresh, { recursive: true, force: true });
  writeFileSync(recordFile, JSON.stringify({ sourcesHash }));
}

await runMain(() => withLock(join(lockFolder, "build.lock"), build));
