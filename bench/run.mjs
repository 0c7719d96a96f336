/**
 * npm run bench -- [--shifts=N] [part…]
 * Measures what the issue of speed is about, each figure beside a bound that is measured in the same run: engine,
 * history, recordings, microphones, choosing, timetable, pages, phone, screens, saving, trail, export, histories. Sets up a database of its own, filled with scale data,
 * and removes it. At the size that it has unless told otherwise, the whole takes less than five minutes on two cores with
 * nothing else to do.
 */

import { spawn } from "node:child_process";
import { mkdirSync, mkdtempSync, openSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { setTimeout as sleep } from "node:timers/promises";
import { openCluster } from "../scripts/lib/cluster.mjs";
import { applicationEnvironment } from "../scripts/lib/environment.mjs";
import { Failure, runMain } from "../scripts/lib/failure.mjs";
import { ensurePackages, requireNode } from "../scripts/lib/packages.mjs";
import { findFreePort, randomPort } from "../scripts/lib/ports.mjs";
import { endActiveRuns, run } from "../scripts/lib/processes.mjs";
import { projectFolder } from "../scripts/lib/project.mjs";

const DATABASE = "dinward_bench";
const DEFAULT_SHIFTS = 60_000;
const allParts = [
  "engine",
  "history",
  "recordings",
  "microphones",
  "choosing",
  "timetable",
  "pages",
  "phone",
  "screens",
  "saving",
  "trail",
  "export",
  "histories",
];
/** As one bundle, as browsers and servers run it: a loader's helpers would be measured with it. */
const bundled = ["engine", "history", "recordings", "microphones", "choosing"];
const needDatabase = ["phone", "screens", "saving", "trail", "export", "histories"];

const given = process.argv.slice(2);
const shifts = Number(given.find((arg) => arg.startsWith("--shifts="))?.slice(9) ?? DEFAULT_SHIFTS);
const named = given.filter((arg) => allParts.includes(arg));
const parts = named.length > 0 ? named : allParts;

async function runStep(what, stepArgs, env, show = false) {
  const options = { cwd: projectFolder, env, show };
  const { code, output, errors } = await run(process.execPath, stepArgs, options);
  if (code !== 0) throw new Failure(`${what} failed${show ? "" : `:\n${output}${errors}`}`);
}

async function bundlePart(part, folder) {
  const { build } = await import("esbuild");
  const outfile = join(folder, `${part}.cjs`);
  await build({
    absWorkingDir: projectFolder,
    entryPoints: [`bench/${part}.ts`],
    outfile,
    bundle: true,
    platform: "node",
    format: "cjs",
    logLevel: "warning",
  });
  return outfile;
}

/** Two organizations of equally many shifts: four years of few people, and the last year of many. */
async function fill(env, cluster) {
  await runStep("The migration", ["--import", "tsx", "server/migrate.ts"], env);
  const seedEnv = { ...env, OWNER_DATABASE_URL: cluster.url("super", DATABASE) };
  for (const days of [1000, 200]) {
    console.log(`Laying out ${shifts / 2} shifts, ${days} days a worker`);
    const flags = [`--shifts=${shifts / 2}`, `--days-a-worker=${days}`];
    await runStep("Filling", ["--import", "tsx", "server/seed-scale.ts", ...flags], seedEnv, true);
  }
}

async function startWeb(env, folder) {
  const log = openSync(join(folder, "web.log"), "a");
  const web = spawn(process.execPath, ["dist/server/web.js"], {
    cwd: projectFolder,
    env,
    stdio: ["ignore", log, log],
  });
  const deadline = Date.now() + 30_000;
  while (
    !(await fetch(`http://127.0.0.1:${env.PORT}/readyz`).then(
      ({ ok }) => ok,
      () => false,
    ))
  ) {
    if (Date.now() > deadline || web.exitCode !== null)
      throw new Failure(
        `the web process did not start:\n${readFileSync(join(folder, "web.log"), "utf8").slice(-2000)}`,
      );
    await sleep(100);
  }
  return web;
}

async function bench() {
  requireNode();
  await ensurePackages();
  const folder = mkdtempSync(join(tmpdir(), "dinward-bench-"));
  let cluster;
  let web;
  try {
    await runStep("The build", ["scripts/build.mjs", "--if-changed"], withoutMode(process.env));
    let env = process.env;
    if (parts.some((part) => needDatabase.includes(part))) {
      cluster = await openCluster({
        folder: join(folder, "cluster"),
        durable: false,
        firstPort: randomPort(),
      });
      await cluster.createDatabase(DATABASE);
      mkdirSync(join(folder, "app"));
      const port = await findFreePort(randomPort());
      env = {
        ...applicationEnvironment({
          mode: "production",
          cluster,
          database: DATABASE,
          ports: { web: port, signIn: 1, smtp: 1 },
          publicUrl: `http://127.0.0.1:${port}`,
          secrets: { client: "unused", session: "unused-".repeat(8), hook: "unused-".repeat(8) },
          dataDir: join(folder, "app"),
        }),
        LOG_LEVEL: "error",
        SUPER_DATABASE_URL: cluster.url("super", DATABASE),
        POSTGRES_LOG: join(cluster.home, "postgres.log"),
        PSQL: join(cluster.programsFolder, "psql"),
      };
      await fill(env, cluster);
      web = await startWeb(env, folder);
      env.WEB_PID = String(web.pid);
    }
    const count = (number) => number.toLocaleString("en");
    console.log(
      cluster
        ? `Benchmarks with ${count(shifts)} shifts in two organizations (--shifts=N for another size)`
        : "Benchmarks",
    );
    for (const part of parts) {
      const began = performance.now();
      const args = bundled.includes(part)
        ? [await bundlePart(part, folder)]
        : ["--import", "tsx", `bench/${part}.ts`];
      await runStep(part, args, env, true);
      console.log(`  (${part}: ${((performance.now() - began) / 1000).toFixed(0)} s)`);
    }
  } finally {
    web?.kill("SIGTERM");
    await cluster?.destroy();
    rmSync(folder, { recursive: true, force: true });
  }
}

/** A bundler under another mode builds for that one. */
const withoutMode = ({ NODE_ENV: _, ...env }) => env;

for (const signal of ["SIGINT", "SIGTERM", "SIGHUP"]) process.on(signal, endActiveRuns);
await runMain(bench);
