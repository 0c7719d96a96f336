import { createReadStream } from "node:fs";
import { parentPort, workerData } from "node:worker_threads";
import { RecordingError } from "./recording-error";
import { type RecordingJob, runRecordingJob } from "./recording-job";

/** What the thread is started with; without a path the bytes come as messages. */
export interface WorkerStart {
  readonly job: RecordingJob;
  readonly path: string | null;
  readonly sizeBytes: number | null;
}

/** To the thread: a piece of the stream, or null at its end. */
export type WorkerInput = Uint8Array | null;

export type WorkerOutput =
  | { readonly kind: "more" }
  | { readonly kind: "share"; readonly share: number }
  | { readonly kind: "done"; readonly result: Awaited<ReturnType<typeof runRecordingJob>> }
  | {
      readonly kind: "refused";
      readonly code: RecordingError["code"];
      readonly params: RecordingError["params"];
    };

const port = parentPort!;
const { job, path, sizeBytes } = workerData as WorkerStart;
const post = (message: WorkerOutput) => port.postMessage(message);

/** The next piece is asked for only when the last is used up: whoever sends is held back by the arithmetic. */
async function* received(): AsyncGenerator<Uint8Array, void, undefined> {
  for (;;) {
    const piece = await new Promise<WorkerInput>((resolve) => {
      port.once("message", resolve);
      post({ kind: "more" });
    });
    if (piece === null) return;
    yield piece;
  }
}

const bytes = path === null ? received() : createReadStream(path, { highWaterMark: 1 << 20 });
try {
  const result = await runRecordingJob({ bytes, sizeBytes }, job, (share) =>
    post({ kind: "share", share }),
  );
  post({ kind: "done", result });
} catch (error) {
  if (!(error instanceof RecordingError)) throw error;
  post({ kind: "refused", code: error.code, params: error.params });
} finally {
  port.close();
}
