/**
 * npm run bench -- [--shifts=N] [part…]
 * Measures what the issue of speed is about, each figure beside a bound that is measured in the same run: engine,
 * screens, saving, export, pages. Sets up a database of its own, filled with scale data, and removes it.
 */

import { spawn } from "node:child_process";
import { mkdirSync, mkdtempSync, openSync, rmSync } from "node:fs";
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
const allParts = ["engine", "pages", "screens", "saving", "export"];
const needDatabase = ["screens", "saving", "export"];

const args = process.argv.slice(2);
const shifts = Number(args.find((arg) => arg.startsWith("--shifts="))?.slice(9) ?? 100_000);
const named = args.filter((arg) => allParts.includes(arg));
const parts = named.length > 0 ? named : allParts;

async function runStep(what, stepArgs, env, show = false) {
  const options = { cwd: projectFolder, env, show };
  const { code, output, errors } = await run(process.execPath, stepArgs, options);
  if (code !== 0) throw new Failure(`${what} failed${show ? "" : `:\n${output}${errors}`}`);
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
      throw new Failure("the web process did not start");
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
          secrets: { client: "unused", session: "unused-".repeat(8) },
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
    for (const part of parts)
      await runStep(part, ["--import", "tsx", `bench/${part}.ts`], env, true);
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
