import { existsSync } from "node:fs";
import { join, resolve } from "node:path";
import { openCluster } from "./cluster.mjs";
import { Failure } from "./failure.mjs";
import { projectFolder } from "./project.mjs";

/** Where the running demo keeps its data. */
export async function demoEnvironment() {
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
