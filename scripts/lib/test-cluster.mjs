import { randomBytes } from "node:crypto";
import { mkdirSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { openCluster } from "./cluster.mjs";
import { withLock } from "./lock.mjs";
import { randomPort } from "./ports.mjs";
import { isSameProcess, processIdentity } from "./processes.mjs";
import { projectFolder } from "./project.mjs";

const folder = join(projectFolder, ".data", "test");
const usersFolder = join(folder, "users");
const lockFile = join(folder, "users.lock");

/** The runs that use the cluster now, by the token in the names of their databases. */
function liveTokens() {
  return readdirSync(usersFolder).filter((token) => {
    const file = join(usersFolder, token);
    if (isSameProcess(JSON.parse(readFileSync(file, "utf8")))) return true;
    rmSync(file, { force: true });
    return false;
  });
}

/** Databases of runs that were killed. */
async function dropOrphans(cluster) {
  const names = await cluster.sql(
    "SELECT datname FROM pg_database WHERE datname LIKE 'dinward\\_test\\_%'",
  );
  const live = liveTokens();
  for (const name of names) {
    if (!live.some((token) => name.startsWith(`dinward_test_${token}`)))
      await cluster.dropDatabase(name);
  }
}

/**
 * The cluster for tests, shared by all runs on this checkout: the first starts it, the last to
 * close stops it. A run's databases bear its `prefix` and are dropped when it closes.
 */
export async function openTestCluster() {
  mkdirSync(usersFolder, { recursive: true });
  const token = randomBytes(4).toString("hex");
  const cluster = await withLock(lockFile, async () => {
    const opened = await openCluster({
      folder: join(folder, "cluster"),
      durable: false,
      firstPort: randomPort(),
    });
    writeFileSync(join(usersFolder, token), JSON.stringify(processIdentity(process.pid)));
    await dropOrphans(opened);
    return opened;
  });

  async function close() {
    await withLock(lockFile, async () => {
      rmSync(join(usersFolder, token), { force: true });
      if (!cluster.isAlive()) return;
      await dropOrphans(cluster);
      if (liveTokens().length === 0) await cluster.stop();
    });
  }

  return { cluster, prefix: `dinward_test_${token}`, close };
}
