import { parentPort, type TransferListItem } from "node:worker_threads";
import type { FromWorker } from "./run-worker";

export interface Served<Reply> {
  reply: Reply;
  /** Buffers that move to the process instead of being copied. */
  transfer?: readonly TransferListItem[];
}

/** In a thread: answers the tasks of `runWorker`, one after the other. */
export function serveWorker<Task, Reply>(
  work: (task: Task, onProgress: (progressPct: number) => void) => Promise<Served<Reply>>,
): void {
  const port = parentPort;
  if (!port) throw new Error("this file runs in a thread");
  const send = (message: FromWorker, transfer?: readonly TransferListItem[]) =>
    port.postMessage(message, transfer);
  port.on("message", (task: Task) => {
    work(task, (progressPct) => send({ kind: "progress", progressPct })).then(
      ({ reply, transfer }) => send({ kind: "done", reply }, transfer),
      (error: unknown) => {
        const { message, stack } = error instanceof Error ? error : new Error(String(error));
        send({ kind: "failed", message, stack });
      },
    );
  });
}
