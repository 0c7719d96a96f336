import { Worker } from "node:worker_threads";

/** What runs in threads of its own, by the file that serves it (scripts/build.mjs bundles each). */
const WORKERS = {
  "history-worker": "histories/history-worker",
  "analyse-worker": "recordings/analyse-worker",
  "pair-worker": "recordings/pair-worker",
  "timetable-worker": "timetables/timetable-worker",
} as const;
export type WorkerName = keyof typeof WORKERS;

export interface WorkerOptions {
  /** 0 to 100. */
  onProgress?: (progressPct: number) => void;
  /** Ends the thread where it stands. */
  signal?: AbortSignal;
}

export type FromWorker =
  | { kind: "progress"; progressPct: number }
  | { kind: "done"; reply: unknown }
  | { kind: "failed"; message: string; stack: string | undefined };

/** Heap of one thread, MB; buffers of levels come on top. */
const HEAP_MB = 256;
/** A thread that has nothing to do is kept this long, for the next file often follows at once. */
const IDLE_MS = 5_000;

const idle = new Map<WorkerName, { worker: Worker; timer: NodeJS.Timeout }[]>();

/** Starts a thread; for those that talk to it themselves. */
export function startWorker(name: WorkerName, workerData?: unknown): Worker {
  const options = { workerData, resourceLimits: { maxOldGenerationSizeMb: HEAP_MB } };
  // Bundled, each thread's file lies beside the process's own.
  if (!import.meta.url.endsWith(".ts"))
    return new Worker(new URL(`./${name}.js`, import.meta.url), options);
  const entry = new URL(`../${WORKERS[name]}.ts`, import.meta.url).href;
  return new Worker(new URL("./thread-from-source.mjs", import.meta.url), {
    ...options,
    argv: [entry],
  });
}

function take(name: WorkerName): Worker {
  const kept = idle.get(name)?.pop();
  if (!kept) return startWorker(name);
  clearTimeout(kept.timer);
  kept.worker.ref();
  return kept.worker;
}

function giveBack(name: WorkerName, worker: Worker): void {
  const kept = idle.get(name) ?? [];
  idle.set(name, kept);
  const entry = {
    worker,
    timer: setTimeout(() => {
      kept.splice(kept.indexOf(entry), 1);
      void worker.terminate();
    }, IDLE_MS),
  };
  entry.timer.unref();
  worker.unref();
  kept.push(entry);
}

/**
 * Runs one task in a thread, so that the process goes on serving.
 *
 * @throws Error what the thread threw, or that it ended; the signal's reason where it was aborted.
 */
export function runWorker<Reply>(
  name: WorkerName,
  task: object,
  { onProgress, signal }: WorkerOptions = {},
): Promise<Reply> {
  signal?.throwIfAborted();
  const worker = take(name);
  return new Promise<Reply>((resolve, reject) => {
    const settle = (work: () => void) => {
      worker.off("message", onMessage);
      worker.off("error", onError);
      worker.off("exit", onExit);
      signal?.removeEventListener("abort", onAbort);
      work();
    };
    const onMessage = (message: FromWorker) => {
      if (message.kind === "progress") onProgress?.(message.progressPct);
      else
        settle(() => {
          giveBack(name, worker);
          if (message.kind === "done") resolve(message.reply as Reply);
          else reject(Object.assign(new Error(message.message), { stack: message.stack }));
        });
    };
    const onError = (error: Error) => settle(() => reject(error));
    const onExit = (code: number) =>
      settle(() => reject(new Error(`the thread ended with code ${code}`)));
    const onAbort = () =>
      settle(() => {
        void worker.terminate().then(() => reject(signal?.reason));
      });
    worker.on("message", onMessage);
    worker.on("error", onError);
    worker.on("exit", onExit);
    signal?.addEventListener("abort", onAbort);
    worker.postMessage(task);
  });
}
