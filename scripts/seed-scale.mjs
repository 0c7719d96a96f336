/**
 * npm run seed:scale -- --shifts=N
 * Adds an organization with N shifts (100,000 unless said) to the running demo, or to the database that
 * OWNER_DATABASE_URL names.
 */
import { existsSync } from "node:fs";
import { join, resolve } from "node:path";
import { openCluster } from "./lib/cluster.mjs";
import { Failure, runMain } from "./lib/failure.mjs";
import { ensurePackages, requireNode } from "./lib/packages.mjs";
import { run } from "./lib/processes.mjs";
import { projectFolder } from "./lib/project.mjs";

/** Where the running demo keeps its data. */
async function demoEnvironment() {
  const folder = resolve(process.env.DINWARD_DATA ?? join(projectFolder, ".data"));
  if (!existsSync(join(folder, "running.json"))) {
    throw new Failure(
      "The demo is not running: run  npm start  first, or set DATABASE_URL and OWNER_DATABASE_URL.",
    );
  }
  const cluster = await openCluster({
    folder: join(folder, "cluster"),
    durable: true,
    firstPort: 0,
  });
  return {
    DATABASE_URL: cluster.url("app", "dinward"),
    OWNER_DATABASE_URL: cluster.url("super", "dinward"),
    DATA_DIR: join(folder, "app"),
  };
}

await runMain(async () => {
  requireNode();
  await ensurePackages();
  const own = process.env.OWNER_DATABASE_URL ? {} : await demoEnvironment();
  const args = ["--import", "tsx", "server/seed-scale.ts", ...process.argv.slice(2)];
  const { code } = await run(process.execPath, args, {
    cwd: projectFolder,
    env: { ...process.env, ...own },
    show: true,
  });
  process.exitCode = code;
});
