import { spawn } from "node:child_process";
import { once } from "node:events";
import { setTimeout as sleep } from "node:timers/promises";
import { fileURLToPath } from "node:url";

export const projectFolder = fileURLToPath(new URL("../..", import.meta.url));

export interface RunningProcess {
  pid: number;
  /** Everything it has written so far. */
  output(): string;
  hasEnded(): boolean;
  /** Resolves with its exit code, or with the signal that ended it. */
  ended: Promise<number | string>;
  signal(signal: NodeJS.Signals): void;
  /** Asks it to end, and insists after 30 s. */
  stop(): Promise<void>;
}

/** Starts a Node.js process that ends at the latest when the tests do. */
export function startProcess(name: string, args: string[], env: NodeJS.ProcessEnv): RunningProcess {
  const child = spawn(process.execPath, args, {
    cwd: projectFolder,
    env,
    stdio: ["ignore", "pipe", "pipe"],
  });
  if (child.pid === undefined) throw new Error(`${name} did not start`);
  let output = "";
  let isOver = false;
  for (const stream of [child.stdout, child.stderr]) {
    stream.setEncoding("utf8").on("data", (text: string) => {
      output += text;
    });
  }
  const killWithUs = () => child.kill("SIGKILL");
  process.once("exit", killWithUs);
  const ended = once(child, "exit").then(([code, signal]) => {
    isOver = true;
    process.removeListener("exit", killWithUs);
    return (code ?? signal) as number | string;
  });
  return {
    pid: child.pid,
    output: () => output,
    hasEnded: () => isOver,
    ended,
    signal: (signal) => void child.kill(signal),
    async stop() {
      if (isOver) return;
      child.kill("SIGTERM");
      const insist = setTimeout(() => child.kill("SIGKILL"), 30_000);
      await ended;
      clearTimeout(insist);
    },
  };
}

/** Waits until an address answers well; gives up early if the process behind it has ended. */
export async function waitFor(address: string, process_: RunningProcess): Promise<void> {
  for (let tries = 0; tries < 600; tries += 1) {
    if (process_.hasEnded()) throw new Error(`it ended before it answered:\n${process_.output()}`);
    const isUp = await fetch(address).then(
      (response) => response.ok,
      () => false,
    );
    if (isUp) return;
    await sleep(100);
  }
  throw new Error(`${address} did not answer:\n${process_.output()}`);
}
