import { spawn } from "node:child_process";
import { existsSync, readdirSync, readFileSync } from "node:fs";
import { setTimeout as sleep } from "node:timers/promises";

export function isAlive(pid) {
  if (!Number.isInteger(pid) || pid <= 0) return false;
  try {
    process.kill(pid, 0);
  } catch (error) {
    return error.code === "EPERM";
  }
  return processState(pid) !== "Z";
}

/** Fields of /proc/PID/stat after the command name, which may itself hold spaces and brackets. */
function processStat(pid) {
  try {
    const text = readFileSync(`/proc/${pid}/stat`, "utf8");
    return text.slice(text.lastIndexOf(")") + 2).split(" ");
  } catch {
    return null;
  }
}

function processState(pid) {
  return processStat(pid)?.[0] ?? null;
}

/** A process number alone is reused after a restart; with its start time it is not. */
export function processIdentity(pid) {
  return { pid, startedAtTick: processStat(pid)?.[19] ?? null };
}

export function isSameProcess(identity) {
  if (!identity || !isAlive(identity.pid)) return false;
  const tick = processStat(identity.pid)?.[19] ?? null;
  return identity.startedAtTick === null || tick === null || tick === identity.startedAtTick;
}

export function commandLineOf(pid) {
  try {
    return readFileSync(`/proc/${pid}/cmdline`, "utf8").replaceAll("\0", " ").trim();
  } catch {
    return null;
  }
}

const activeRuns = new Set();

/** Ends the programs that `run` is waiting for, when we stop before they do. */
export function endActiveRuns() {
  for (const child of activeRuns) child.kill("SIGTERM");
}

/**
 * Runs a program to its end. `show: true` lets its output through, otherwise it is collected.
 * Never throws on a non-zero exit code: the caller knows what a failure means.
 */
export function run(program, args, { show = false, input, ...options } = {}) {
  return new Promise((done) => {
    const child = spawn(program, args, {
      ...options,
      stdio: [
        input === undefined ? "ignore" : "pipe",
        show ? "inherit" : "pipe",
        show ? "inherit" : "pipe",
      ],
    });
    if (!options.detached) activeRuns.add(child);
    let output = "";
    let errors = "";
    child.stdout?.setEncoding("utf8").on("data", (text) => {
      output += text;
    });
    child.stderr?.setEncoding("utf8").on("data", (text) => {
      errors += text;
    });
    child.on("error", (error) => done({ code: -1, output, errors: `${errors}${error.message}` }));
    child.on("close", (code, signal) => {
      activeRuns.delete(child);
      done({ code: code ?? -1, signal, output, errors });
    });
    if (input !== undefined) {
      child.stdin.on("error", () => {}); // a program that ends early says why on its error output
      child.stdin.end(input);
    }
  });
}

/** Ends a process group: asks first, insists after the grace period. */
export async function endGroup(pid, graceMs = 10_000) {
  signalGroup(pid, "SIGTERM");
  const deadline = Date.now() + graceMs;
  while (isGroupAlive(pid) && Date.now() < deadline) await sleep(50);
  if (isGroupAlive(pid)) signalGroup(pid, "SIGKILL");
}

function signalGroup(pid, signal) {
  try {
    process.kill(-pid, signal);
  } catch (error) {
    if (error.code !== "ESRCH") throw error;
  }
}

function isGroupAlive(group) {
  try {
    process.kill(-group, 0);
  } catch (error) {
    return error.code === "EPERM";
  }
  // A zombie that nobody collects still counts for kill(), and would be waited for in vain.
  if (!existsSync("/proc/self/stat")) return true;
  return readdirSync("/proc")
    .filter((name) => /^\d+$/.test(name))
    .map((name) => processStat(name))
    .some((stat) => stat !== null && stat[0] !== "Z" && Number(stat[2]) === group);
}
