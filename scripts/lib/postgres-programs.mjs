import { appendFileSync, existsSync, mkdirSync, readdirSync, realpathSync } from "node:fs";
import { delimiter, dirname, join } from "node:path";
import { installDebianPackages, isRoot } from "./apt.mjs";
import { run } from "./processes.mjs";

const OLDEST_VERSION = 15;
const PROGRAMS = ["postgres", "initdb", "pg_ctl", "psql", "pg_dump", "pg_restore"];

/**
 * Folders that may hold PostgreSQL, newest version first. On PATH a distribution may keep wrappers
 * that pick a version of their own, so the folder behind a link counts, and only if it is complete.
 */
function candidateFolders() {
  const debian = "/usr/lib/postgresql";
  const versions = existsSync(debian)
    ? readdirSync(debian).sort((a, b) => Number(b) - Number(a))
    : [];
  const onPath = (process.env.PATH ?? "")
    .split(delimiter)
    .map((folder) => join(folder, "postgres"))
    .filter((file) => existsSync(file))
    .map((file) => dirname(realpathSync(file)));
  return [...new Set([...versions.map((version) => join(debian, version, "bin")), ...onPath])];
}

async function versionIn(folder) {
  if (!PROGRAMS.every((program) => existsSync(join(folder, program)))) return null;
  const { code, output } = await run(join(folder, "postgres"), ["--version"]);
  const version = Number(/ (\d+)/.exec(output)?.[1]);
  return code === 0 && version >= OLDEST_VERSION ? version : null;
}

async function lookForPrograms() {
  for (const folder of candidateFolders()) {
    const version = await versionIn(folder);
    if (version !== null) return { folder, version };
  }
  return null;
}

/** The folder with PostgreSQL's programs, version 15 or newer; installs Debian's package as root. */
export async function findPostgresPrograms() {
  const found = await lookForPrograms();
  if (found) return found;
  if (isRoot) {
    // Otherwise the package makes a cluster of its own and a service that takes port 5432.
    mkdirSync("/etc/postgresql-common", { recursive: true });
    appendFileSync("/etc/postgresql-common/createcluster.conf", "create_main_cluster = false\n");
  }
  await installDebianPackages(["postgresql"], `PostgreSQL ${OLDEST_VERSION} or newer`);
  const installed = await lookForPrograms();
  if (!installed) throw new Error("PostgreSQL was installed but its programs were not found");
  return installed;
}
