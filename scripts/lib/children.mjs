import { spawn } from "node:child_process";
import {
  closeSync,
  existsSync,
  mkdirSync,
  openSync,
  readFileSync,
  statSync,
  truncateSync,
} from "node:fs";
import { join } from "node:path";
import { endGroup, processIdentity } from "./processes.mjs";
import { projectFolder } from "./project.mjs";

const LOG_LIMIT_BYTES = 20_000_000;

/**
 * The long-running processes of a start: each in a process group of its own, so that it goes with
 * all its descendants, and each with a log file.
 */
export class Children {
  #running = new Map();
  #isStopping = false;

  /** `onDeath(line)` is told, once, when a child ends without having been asked to. */
  constructor({ logFolder, show = false, onDeath }) {
    this.logFolder = logFolder;
    this.show = show;
    this.onDeath = onDeath;
    mkdirSync(logFolder, { recursive: true });
  }

  /** Starts a Node.js process. */
  start(name, args, env) {
    const logFile = join(this.logFolder, `${name}.log`);
    if (existsSync(logFile) && statSync(logFile).size > LOG_LIMIT_BYTES) truncateSync(logFile);
    const log = this.show ? "inherit" : openSync(logFile, "a");
    const logStart = existsSync(logFile) ? statSync(logFile).size : 0;
    const child = spawn(process.execPath, args, {
      cwd: projectFolder,
      env,
      detached: true,
      stdio: ["ignore", log, log],
    });
    if (log !== "inherit") closeSync(log);
    this.#running.set(name, child);
    child.on("error", (error) => this.#report(name, error.message, logFile));
    child.on("exit", (code, signal) => {
      this.#running.delete(name);
      const lastLine = this.show ? "" : lastWords(logFile, logStart);
      this.#report(name, lastLine || `exit ${signal ?? code}`, logFile);
    });
    return child;
  }

  #report(name, reason, logFile) {
    if (this.#isStopping) return;
    const where = this.show ? "" : ` (log: ${logFile})`;
    this.onDeath(`The ${name} process ended unexpectedly: ${reason}${where}`);
  }

  identities() {
    return [...this.#running].map(([name, child]) => ({ name, ...processIdentity(child.pid) }));
  }

  /** Ends the children in the order given, the rest after them, together with what they started. */
  async stop(first = []) {
    this.#isStopping = true;
    const end = async (names) => {
      const children = names.map((name) => this.#running.get(name)).filter(Boolean);
      await Promise.all(children.map((child) => endGroup(child.pid, 15_000)));
    };
    await end(first);
    await end([...this.#running.keys()]);
  }
}

/** The last line that a process wrote, in so far as it is one for people and not a log record. */
function lastWords(file, from) {
  const written = readFileSync(file).subarray(from).toString("utf8").trim();
  return (
    written
      .split("\n")
      .filter((line) => line && !line.startsWith("{") && !/^\s+at /.test(line))
      .at(-1) ?? ""
  );
}

/** The end of a log, for the one who has to find out why. */
export function readTail(file, lines = 30) {
  return existsSync(file)
    ? readFileSync(file, "utf8").trimEnd().split("\n").slice(-lines).join("\n")
    : "";
}
