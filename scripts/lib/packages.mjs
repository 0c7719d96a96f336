import { existsSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { Failure } from "./failure.mjs";
import { withLock } from "./lock.mjs";
import { run } from "./processes.mjs";
import { lockFolder, projectFolder } from "./project.mjs";

const OLDEST_NODE = [20, 19];

export function requireNode() {
  const [major, minor] = process.versions.node.split(".").map(Number);
  if (major > OLDEST_NODE[0] || (major === OLDEST_NODE[0] && minor >= OLDEST_NODE[1])) return;
  throw new Failure(
    `Node.js ${OLDEST_NODE.join(".")} or newer is needed; this is ${process.versions.node}.`,
  );
}

function packagesIn(file) {
  return JSON.parse(readFileSync(file, "utf8")).packages;
}

/**
 * Whether node_modules holds what the lock file says. npm leaves its own record of what it installed,
 * and writes it last: an installation that was cut short has none.
 */
function arePackagesCurrent() {
  const record = join(projectFolder, "node_modules", ".package-lock.json");
  if (!existsSync(record)) return false;
  const wanted = packagesIn(join(projectFolder, "package-lock.json"));
  const installed = packagesIn(record);
  return Object.entries(wanted).every(
    ([path, { version, optional }]) =>
      path === "" || optional || installed[path]?.version === version,
  );
}

/** Installs packages from the lock file unless they are there already. */
export async function ensurePackages() {
  if (arePackagesCurrent()) return;
  await withLock(join(lockFolder, "packages.lock"), async () => {
    if (arePackagesCurrent()) return;
    console.log("Installing packages (npm ci)");
    const result = await run("npm", ["ci", "--no-audit", "--no-fund", "--include=dev"], {
      cwd: projectFolder,
    });
    if (result.code === 0) return;
    const lines = result.errors.split("\n").filter((line) => /^npm (ERR!|error)/.test(line));
    const reason = (
      lines.find((line) => /ENOSPC|EACCES|ENOTFOUND|code /.test(line)) ??
      lines[0] ??
      ""
    ).trim();
    throw new Failure(`The packages could not be installed (npm ci): ${reason}`);
  });
}
