import { serveWorker } from "../lib/serve-worker";
import { type PairReply, type PairTask, readPairs } from "./pair-job";

serveWorker<PairTask, PairReply>(async (task, onProgress) => ({
  reply: await readPairs(task, onProgress),
}));
