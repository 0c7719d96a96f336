import { stat } from "node:fs/promises";
import type { Readable } from "node:stream";
import type { Worker } from "node:worker_threads";
import { startWorker } from "../lib/run-worker";
import type { WorkerInput, WorkerOutput, WorkerStart } from "./analyse-worker";
import { RecordingError } from "./recording-error";
import type { RecordingJob, RecordingResult } from "./recording-job";

export interface RecordingCallbacks {
  /** Share of the recording that is done, 0 to 1. */
  readonly onProgress?: (share: number) => void;
  /** Ends the thread at once; the promise then rejects with the signal's reason. Nothing is left behind. */
  readonly signal?: AbortSignal;
}

/** A file by its path, or a stream, which is used up, with its length where that is known. */
export type Recording = string | { readonly stream: Readable; readonly sizeBytes: number | null };

/**
 * Analyses a recording in a thread of its own, so that whoever else is served is not slowed, in memory that does not
 * grow with its length.
 *
 * @throws RecordingError where the recording cannot be used, or has a fault that `job.accept` does not name.
 */
export async function analyseRecording<Job extends RecordingJob>(
  recording: Recording,
  job: Job,
  { onProgress, signal }: RecordingCallbacks = {},
): Promise<RecordingResult<Job>> {
  signal?.throwIfAborted();
  const isPath = typeof recording === "string";
  const start: WorkerStart = {
    job,
    path: isPath ? recording : null,
    sizeBytes: isPath ? (await stat(recording)).size : recording.sizeBytes,
  };
  signal?.throwIfAborted();
  const worker = startWorker("analyse-worker", start);
  const pieces = isPath ? null : recording.stream[Symbol.asyncIterator]();
  let onAbort: (() => void) | undefined;
  try {
    return await new Promise<RecordingResult<Job>>((resolve, reject) => {
      onAbort = () => reject(signal?.reason);
      signal?.addEventListener("abort", onAbort);
      worker.on("error", reject);
      worker.on("exit", () => reject(new Error("the thread ended without an answer")));
      worker.on("message", (message: WorkerOutput) => {
        switch (message.kind) {
          case "share":
            onProgress?.(message.share);
            break;
          case "more":
            sendNext(worker, pieces!).catch(reject);
            break;
          case "refused":
            reject(new RecordingError(message.code, message.params));
            break;
          case "done":
            resolve(message.result as RecordingResult<Job>);
        }
      });
    });
  } finally {
    if (onAbort) signal?.removeEventListener("abort", onAbort);
    await worker.terminate();
    // Not through the iterator: that would wait for a sender who has stalled.
    if (!isPath) recording.stream.destroy();
  }
}

/** Pieces of a stream can share one buffer; each goes over as a copy of its own, which is then handed over whole. */
async function sendNext(worker: Worker, pieces: AsyncIterator<Uint8Array>): Promise<void> {
  const { value, done } = await pieces.next();
  const piece: WorkerInput = done ? null : Uint8Array.from(value);
  worker.postMessage(piece, piece === null ? [] : [piece.buffer as ArrayBuffer]);
}
