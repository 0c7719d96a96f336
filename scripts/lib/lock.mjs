import { linkSync, mkdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { dirname } from "node:path";
import { setTimeout as sleep } from "node:timers/promises";
import { explainFileError } from "./failure.mjs";
import { isSameProcess, processIdentity } from "./processes.mjs";

/** Who holds the lock file, or null when nobody alive does. */
export function lockHolder(file) {
  try {
    const holder = JSON.parse(readFileSync(file, "utf8"));
    return isSameProcess(holder) ? holder : null;
  } catch {
    return null;
  }
}

/** Takes the lock file if nobody alive holds it; says whether it did. */
export function tryLock(file, facts = {}) {
  const draft = `${file}.${process.pid}`;
  try {
    mkdirSync(dirname(file), { recursive: true });
    writeFileSync(draft, JSON.stringify({ ...processIdentity(process.pid), ...facts }), {
      mode: 0o600,
    });
    // Linked into place, so that nobody ever reads a lock that is only half written.
    if (link(draft, file)) return true;
    if (lockHolder(file)) return false;
    rmSync(file, { force: true }); // left behind by a process that was killed
    return link(draft, file);
  } catch (error) {
    throw explainFileError(error, dirname(file));
  } finally {
    rmSync(draft, { force: true });
  }
}

function link(from, to) {
  try {
    linkSync(from, to);
    return true;
  } catch (error) {
    if (error.code === "EEXIST") return false;
    throw error;
  }
}

export function unlock(file) {
  rmSync(file, { force: true });
}

/** Runs `work` while no other process runs its own under the same lock file. */
export async function withLock(file, work) {
  while (!tryLock(file)) await sleep(150);
  try {
    return await work();
  } finally {
    unlock(file);
  }
}
