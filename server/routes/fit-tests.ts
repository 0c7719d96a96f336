import { IdParams } from "../../shared/schemas/common";
import {
  FitTestChange,
  FitTestFilter,
  FitTestInput,
  FitTestPage,
  FitTestView,
  FitTestVoid,
  FittingDesk,
  FittingFound,
  FittingLookup,
} from "../../shared/schemas/fit";
import { correctFitTest, recordFitTest, voidFitTest } from "../commands/record-fit-test";
import { endpoint } from "../lib/endpoint";
import { AppError } from "../lib/errors";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { FitTest } from "../models/fit";
import { Worker } from "../models/worker";
import { fitPolicy, may, workerPolicy } from "../policies";
import { fitTestsById, listFitTests } from "../queries/fit-tests";
import { fittingDesk } from "../queries/fitting-desk";
import { lookUpWorkers } from "../queries/workers";

const view = async (actor: Actor, id: string) => only(await fitTestsById(actor, id));

/** One that stands, locked, as the caller saw it. */
async function testToChange(actor: Actor, id: string, seen: number): Promise<FitTest> {
  const test = await findVisible(FitTest, fitPolicy, id, actor, { lock: true });
  authorize(fitPolicy, actor, "change", test);
  await requireRevision(test, seen, () => view(actor, id));
  if (test.isVoid) throw new AppError("wrong-state", 409);
  return test;
}

export function defineFitTestRoutes(): void {
  endpoint.get(
    "/fitting/lookup",
    {
      summary: "Who stands at the desk, by employee number or name",
      may: may.readFitting,
      query: FittingLookup,
      reply: FittingFound,
    },
    async ({ actor, query }) => ({ rows: await lookUpWorkers(actor, query.employeeNumber) }),
  );

  endpoint.get(
    "/workers/:id/fitting",
    {
      summary: "A worker at the fitting desk: need, candidates, fits and what was handed out",
      may: may.readFitting,
      params: IdParams,
      reply: FittingDesk,
      reads: { kind: "fits", worker: ({ params }) => params.id },
    },
    async ({ actor, params }) =>
      fittingDesk(actor, await findVisible(Worker, workerPolicy, params.id, actor)),
  );

  endpoint.get(
    "/fit-tests",
    {
      summary: "Fit tests, the latest first",
      may: may.readDays,
      query: FitTestFilter,
      reply: FitTestPage,
      reads: { kind: "fits", worker: ({ query }) => query.workerId },
    },
    ({ actor, query }) => listFitTests(actor, query),
  );

  endpoint.post(
    "/workers/:id/fit-tests",
    {
      summary: "What a protector takes off on this worker, from its trials",
      may: may.officer,
      params: IdParams,
      body: FitTestInput,
      reply: FitTestView,
    },
    async ({ actor, params, body }) => {
      const worker = await findVisible(Worker, workerPolicy, params.id, actor, { lock: true });
      authorize(fitPolicy, actor, "test", worker);
      const test = await recordFitTest(actor, worker, body);
      return view(actor, test.id);
    },
  );

  endpoint.put(
    "/fit-tests/:id",
    {
      summary: "Correct a fit test; what was entered stays as its earlier revision",
      may: may.officer,
      params: IdParams,
      body: FitTestChange,
      reply: FitTestView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const test = await testToChange(actor, params.id, ifMatch);
      await correctFitTest(actor, test, body);
      return view(actor, test.id);
    },
  );

  endpoint.post(
    "/fit-tests/:id/void",
    {
      summary: "Strike a fit test out: it stays on record and counts for nothing",
      may: may.officer,
      params: IdParams,
      body: FitTestVoid,
      reply: FitTestView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const test = await testToChange(actor, params.id, ifMatch);
      await voidFitTest(actor, test, body.reason);
      return view(actor, test.id);
    },
  );
}
