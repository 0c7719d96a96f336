import { IdParams } from "../../shared/schemas/common";
import {
  SignInCodeView,
  WorkerFilter,
  WorkerInput,
  WorkerNameFilter,
  WorkerNameList,
  WorkerPage,
  WorkerView,
} from "../../shared/schemas/worker";
import { changeWorker } from "../commands/change-worker";
import { createWorker } from "../commands/create-worker";
import { issueSignInCode } from "../commands/issue-sign-in-code";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Site } from "../models/site";
import { Worker } from "../models/worker";
import { may, sitePolicy, workerNamePolicy, workerPolicy } from "../policies";
import { presentWorker, presentWorkerRow } from "../presenters/worker";
import { findWorkerDetail, findWorkerNames, pageOfWorkers } from "../queries/workers";

const view = async (actor: Actor, id: string) =>
  presentWorker(actor, only(await findWorkerDetail(actor, id)));

export function defineWorkerRoutes(): void {
  endpoint.get(
    "/workers",
    {
      summary: "Workers by name, with their last day",
      may: may.listRecords,
      query: WorkerFilter,
      reply: WorkerPage,
    },
    async ({ actor, query }) => {
      const { rows, next } = await pageOfWorkers(actor, query);
      return { rows: rows.map(presentWorkerRow), next };
    },
  );

  endpoint.get(
    "/worker-names",
    {
      summary: "Names and numbers, to link a sign-in to",
      may: may.issueCodes,
      query: WorkerNameFilter,
      reply: WorkerNameList,
    },
    async ({ actor, query }) => ({ rows: await findWorkerNames(actor, query) }),
  );

  endpoint.get(
    "/workers/:id",
    {
      summary: "One worker",
      may: may.readDays,
      params: IdParams,
      reply: WorkerView,
      reads: { kind: "page", worker: ({ params }) => params.id },
    },
    async ({ actor, params }) => view(actor, params.id),
  );

  endpoint.post(
    "/workers",
    { summary: "Add a worker", may: may.officer, body: WorkerInput, reply: WorkerView },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(workerPolicy, actor, "change", { id: "", siteId: site.id });
      const worker = await createWorker(actor, body);
      // This answer is kept for a repeated key; the reason stands in its own table and nowhere else.
      return { ...(await view(actor, worker.id)), requirementReason: null };
    },
  );

  endpoint.put(
    "/workers/:id",
    {
      summary: "Change a worker",
      may: may.officer,
      params: IdParams,
      body: WorkerInput,
      reply: WorkerView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const worker = await findVisible(Worker, workerPolicy, params.id, actor, { lock: true });
      authorize(workerPolicy, actor, "change", worker);
      await requireRevision(worker, ifMatch, () => view(actor, worker.id));
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(workerPolicy, actor, "change", { id: worker.id, siteId: site.id });
      await changeWorker(actor, worker, site, body);
      return view(actor, worker.id);
    },
  );

  endpoint.post(
    "/workers/:id/sign-in-codes",
    {
      summary: "A one-use code that binds a sign-in to a worker",
      may: may.issueCodes,
      params: IdParams,
      reply: SignInCodeView,
      isReplySecret: true,
    },
    async ({ actor, params }) => {
      const worker = await findVisible(Worker, workerNamePolicy, params.id, actor, { lock: true });
      authorize(workerNamePolicy, actor, "issueCode", worker);
      const { code, expiresAt } = await issueSignInCode(actor, worker);
      return { code, expiresAt: expiresAt.toISOString() };
    },
  );
}
