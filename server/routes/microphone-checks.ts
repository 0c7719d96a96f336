import { IdParams, PageQuery } from "../../shared/schemas/common";
import {
  CHECK_FILE_LIMIT_BYTES,
  CHECK_FILES_AT_MOST,
  CheckKeep,
  MicrophoneCheckForm,
  MicrophoneCheckPage,
  MicrophoneCheckView,
  TypedCheckInput,
} from "../../shared/schemas/microphone-check";
import { cancelMicrophoneCheck } from "../commands/cancel-microphone-check";
import { keepMicrophoneCheck } from "../commands/keep-microphone-check";
import { startMicrophoneCheck } from "../commands/start-microphone-check";
import { swapMicrophoneCheck } from "../commands/swap-microphone-check";
import { typeMicrophoneCheck } from "../commands/type-microphone-check";
import { endpoint } from "../lib/endpoint";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { MicrophoneCheck } from "../models/fit";
import { ProtectorModel } from "../models/protector";
import { Task } from "../models/task";
import { Worker } from "../models/worker";
import { fitPolicy, may, programmePolicy, protectorPolicy, workerPolicy } from "../policies";
import { listMicrophoneChecks, microphoneCheckView } from "../queries/microphone-checks";

/** The check, locked, where this actor may change it. */
async function checkToChange(actor: Actor, id: string): Promise<MicrophoneCheck> {
  const found = await findVisible(MicrophoneCheck, fitPolicy, id, actor, { lock: true });
  authorize(fitPolicy, actor, "change", found);
  return found;
}

/** The worker of a new check, and whatever else it names is this actor's to see. */
async function workerToCheck(
  actor: Actor,
  id: string,
  { modelId, taskId }: { modelId: string; taskId: string | null },
): Promise<Worker> {
  const worker = await findVisible(Worker, workerPolicy, id, actor);
  authorize(fitPolicy, actor, "test", worker);
  await findVisible(ProtectorModel, protectorPolicy, modelId, actor);
  if (taskId !== null) await findVisible(Task, programmePolicy, taskId, actor);
  return worker;
}

export function defineMicrophoneCheckRoutes(): void {
  endpoint.get(
    "/workers/:id/microphone-checks",
    {
      summary: "A worker's two-microphone checks, latest first",
      may: may.readFitting,
      params: IdParams,
      query: PageQuery,
      reply: MicrophoneCheckPage,
      reads: { kind: "fits", worker: ({ params }) => params.id },
    },
    async ({ actor, params, query }) => {
      const worker = await findVisible(Worker, workerPolicy, params.id, actor);
      return listMicrophoneChecks(actor, worker.id, query);
    },
  );

  endpoint.post(
    "/workers/:id/microphone-checks",
    {
      summary: "Send in recordings from outside and inside a worker's protector, to be analysed",
      may: may.officer,
      params: IdParams,
      body: MicrophoneCheckForm,
      reply: MicrophoneCheckView,
      upload: { limitBytes: CHECK_FILE_LIMIT_BYTES, toStore: true, atMost: CHECK_FILES_AT_MOST },
    },
    async ({ actor, params, body, stagedFiles }) => {
      const worker = await workerToCheck(actor, params.id, body.check);
      return microphoneCheckView(
        actor,
        await startMicrophoneCheck(actor, worker, body, stagedFiles),
      );
    },
  );

  endpoint.post(
    "/workers/:id/microphone-checks/typed",
    {
      summary: "Octave bands from outside and inside a worker's protector, typed off a meter",
      may: may.officer,
      params: IdParams,
      body: TypedCheckInput,
      reply: MicrophoneCheckView,
    },
    async ({ actor, params, body }) => {
      const worker = await workerToCheck(actor, params.id, body);
      return microphoneCheckView(actor, await typeMicrophoneCheck(actor, worker, body));
    },
  );

  endpoint.get(
    "/microphone-checks/:id",
    {
      summary: "A two-microphone check: its progress, then what was found",
      may: may.readFitting,
      params: IdParams,
      reply: MicrophoneCheckView,
    },
    ({ actor, params }) => microphoneCheckView(actor, params.id),
  );

  endpoint.post(
    "/microphone-checks/:id/cancel",
    {
      summary: "Give a check up, with its audio",
      may: may.officer,
      params: IdParams,
      reply: MicrophoneCheckView,
      status: 200,
    },
    async ({ actor, params }) => {
      const check = await checkToChange(actor, params.id);
      await cancelMicrophoneCheck(actor, check);
      return microphoneCheckView(actor, check.id);
    },
  );

  endpoint.post(
    "/microphone-checks/:id/swap",
    {
      summary: "Outside and inside were the other way round: judge the check again",
      may: may.officer,
      params: IdParams,
      reply: MicrophoneCheckView,
      status: 200,
    },
    async ({ actor, params }) => {
      const check = await checkToChange(actor, params.id);
      await swapMicrophoneCheck(actor, check);
      return microphoneCheckView(actor, check.id);
    },
  );

  endpoint.post(
    "/microphone-checks/:id/keep",
    {
      summary: "A check becomes a fit test, or the other ear of one of the same day",
      may: may.officer,
      params: IdParams,
      body: CheckKeep,
      reply: MicrophoneCheckView,
    },
    async ({ actor, params, body }) => {
      const seen = await findVisible(MicrophoneCheck, fitPolicy, params.id, actor);
      authorize(fitPolicy, actor, "change", seen);
      // The worker before the check: in the order in which whoever records a fit locks them.
      const worker = await findVisible(Worker, workerPolicy, seen.workerId, actor, { lock: true });
      const check = await checkToChange(actor, params.id);
      await keepMicrophoneCheck(actor, check, worker, body);
      return microphoneCheckView(actor, check.id);
    },
  );
}
