import { z } from "zod";
import { IdParams } from "../../shared/schemas/common";
import { CrewSheetView } from "../../shared/schemas/crew";
import { DayParams, ResultView } from "../../shared/schemas/result";
import { WaitingQuery, WaitingView } from "../../shared/schemas/waiting";
import { HistoryFilter, HistoryPage } from "../../shared/schemas/worker";
import { endpoint } from "../lib/endpoint";
import { findVisible } from "../lib/policy";
import { Crew, Worker } from "../models/worker";
import { crewPolicy, may, workerPolicy } from "../policies";
import { crewSheet } from "../queries/crew-sheet";
import { resultOfDay, storedResult } from "../queries/result-view";
import { waitingFor } from "../queries/waiting";
import { workerHistory } from "../queries/worker-history";

export function defineDayRoutes(): void {
  endpoint.get(
    "/waiting",
    {
      summary: "What needs a person, most urgent first",
      may: may.officer,
      query: WaitingQuery,
      reply: WaitingView,
    },
    ({ actor, query }) => waitingFor(actor, query.siteId),
  );

  endpoint.get(
    "/crews/:id/sheet",
    {
      summary: "A crew's expected day and last shift",
      may: may.readCrews,
      params: IdParams,
      reply: CrewSheetView,
    },
    async ({ actor, params }) =>
      crewSheet(actor, await findVisible(Crew, crewPolicy, params.id, actor)),
  );

  endpoint.get(
    "/workers/:id/days",
    {
      summary: "A worker's days, latest first",
      may: may.readDays,
      params: IdParams,
      query: HistoryFilter,
      reply: HistoryPage,
      reads: { kind: "history", worker: ({ params }) => params.id },
    },
    async ({ actor, params, query }) => {
      const worker = await findVisible(Worker, workerPolicy, params.id, actor);
      return workerHistory(actor, worker.id, query);
    },
  );

  endpoint.get(
    "/workers/:id/days/:date",
    {
      summary: "A day's current result with all that its working is drawn from",
      may: may.readDays,
      params: DayParams,
      reply: ResultView,
      reads: { kind: "result", worker: ({ params }) => params.id },
    },
    ({ actor, params }) => resultOfDay(actor, params.id, params.date),
  );

  endpoint.get(
    "/results/:id",
    {
      summary: "Any result ever computed",
      may: may.readDays,
      params: z.object({ id: z.uuid() }),
      reply: ResultView,
      reads: { kind: "result", worker: (_, { worker }) => worker.id },
    },
    ({ actor, params }) => storedResult(actor, params.id),
  );
}
