/**
 * npm run verify:trail [-- --seal=1234]
 * Holds every seal and every row against the trail, in the database that DATABASE_URL names or in the running demo. Exit
 * code 1 where anything differs. With --seal it prints that seal, to compare with one kept elsewhere.
 */
import { existsSync } from "node:fs";
import { join } from "node:path";
import { demoEnvironment } from "./lib/demo-environment.mjs";
import { Failure, runMain } from "./lib/failure.mjs";
import { run } from "./lib/processes.mjs";
import { projectFolder } from "./lib/project.mjs";

await runMain(async () => {
  const program = join(projectFolder, "dist", "server", "verify-trail.js");
  if (!existsSync(program)) throw new Failure("It is not built yet: run  npm run build  first.");
  const own = process.env.DATABASE_URL ? {} : await demoEnvironment();
  const { code } = await run(
    process.execPath,
    ["--enable-source-maps", program, ...process.argv.slice(2)],
    {
      cwd: projectFolder,
      env: { ...process.env, ...own },
      show: true,
    },
  );
  process.exitCode = code;
});
