import { OwnAccess, ReadFilter, ReadPage, WorkerReaders } from "../../shared/schemas/access";
import { IdParams } from "../../shared/schemas/common";
import { endpoint } from "../lib/endpoint";
import { findVisible } from "../lib/policy";
import { Worker } from "../models/worker";
import { may, workerPolicy } from "../policies";
import { listReads, readersOfAccount, readersOfWorker } from "../queries/access";

/** Who can read whose record, and who did. */
export function defineAccessRoutes(): void {
  endpoint.get(
    "/me/access",
    { summary: "Who can see one's own data, and what of it", may: "signed-in", reply: OwnAccess },
    async ({ actor }) => ({
      account: await readersOfAccount(),
      record: actor.workerId === null ? null : await readersOfWorker(actor.workerId),
    }),
  );

  endpoint.get(
    "/workers/:id/access",
    {
      summary: "Who can see a worker's record",
      may: may.readDays,
      params: IdParams,
      reply: WorkerReaders,
    },
    async ({ actor, params }) => {
      const worker = await findVisible(Worker, workerPolicy, params.id, actor);
      return { rows: await readersOfWorker(worker.id) };
    },
  );

  endpoint.get(
    "/record-reads",
    {
      summary: "Who read whose record, the latest first",
      may: may.readReads,
      query: ReadFilter,
      reply: ReadPage,
    },
    ({ actor, query }) => listReads(actor, query),
  );
}
