/**
 * npm run seed:scale -- --shifts=N
 * Adds an organization with N shifts (100,000 unless said) to the running demo, or to the database that
 * OWNER_DATABASE_URL names.
 */
import { demoEnvironment } from "./lib/demo-environment.mjs";
import { runMain } from "./lib/failure.mjs";
import { ensurePackages, requireNode } from "./lib/packages.mjs";
import { run } from "./lib/processes.mjs";
import { projectFolder } from "./lib/project.mjs";

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
