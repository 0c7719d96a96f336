import { AtEarQuery, AtEarView } from "../../shared/schemas/at-ear";
import { IdParams } from "../../shared/schemas/common";
import { endpoint } from "../lib/endpoint";
import { findVisible } from "../lib/policy";
import { ProtectorModel } from "../models/protector";
import { Task } from "../models/task";
import { Worker } from "../models/worker";
import { may, programmePolicy, protectorPolicy, workerPolicy } from "../policies";
import { atEar } from "../queries/at-ear";

export function defineAtEarRoutes(): void {
  endpoint.get(
    "/protectors/:id/at-ear",
    {
      summary: "A protector, or two, in a task's noise by every method",
      may: may.readProgramme,
      params: IdParams,
      query: AtEarQuery,
      reply: AtEarView,
    },
    async ({ actor, params, query: { taskId, outerId, workerId } }) =>
      atEar({
        inner: await findVisible(ProtectorModel, protectorPolicy, params.id, actor),
        outer: outerId ? await findVisible(ProtectorModel, protectorPolicy, outerId, actor) : null,
        task: await findVisible(Task, programmePolicy, taskId, actor),
        worker: workerId ? await findVisible(Worker, workerPolicy, workerId, actor) : null,
      }),
  );
}
