import { randomUUID } from "node:crypto";
import { IdParams } from "../../shared/schemas/common";
import {
  OutingBoard,
  OutingQuery,
  OutingReturn,
  OutingStart,
  OutingUndo,
} from "../../shared/schemas/outing";
import { RunView } from "../../shared/schemas/run";
import { endOuting, undoOuting } from "../commands/end-outing";
import { recomputeRunDay } from "../commands/recompute-run-day";
import { recordOuting } from "../commands/record-outing";
import { startOuting } from "../commands/start-outing";
import { todayAt } from "../lib/calendar";
import { endpoint } from "../lib/endpoint";
import { forbidden, issue, stale, unprocessable } from "../lib/errors";
import { type Actor, abilities, authorize, findVisible } from "../lib/policy";
import { Instrument, Run } from "../models/instrument";
import { Area, Site } from "../models/site";
import { Survey } from "../models/survey";
import { Worker } from "../models/worker";
import {
  may,
  programmePolicy,
  runPolicy,
  sitePolicy,
  surveyPolicy,
  workerPolicy,
} from "../policies";
import { outingBoard } from "../queries/outings";
import { runView } from "../queries/run-view";

const view = async (actor: Actor, id: string) =>
  runView(actor, await findVisible(Run, runPolicy, id, actor));

/** Where an instrument goes decides at which site the run is: the worker's, the place's. */
async function siteOfOuting(actor: Actor, input: OutingStart): Promise<Site> {
  const worker = input.workerId
    ? await findVisible(Worker, workerPolicy, input.workerId, actor)
    : null;
  const area = input.areaId ? await findVisible(Area, programmePolicy, input.areaId, actor) : null;
  const siteId = worker?.siteId ?? area?.siteId;
  if (!siteId) throw unprocessable([issue(["workerId"], "worker-or-place")]);
  if (worker && area && worker.siteId !== area.siteId)
    throw unprocessable([issue(["areaId"], "area-of-other-site")]);
  if (worker && input.date < worker.hiredOn)
    throw unprocessable([issue(["workerId"], "before-hire", { hiredOn: worker.hiredOn })]);
  if (input.surveyId) {
    const survey = await findVisible(Survey, surveyPolicy, input.surveyId, actor);
    if (survey.siteId !== siteId)
      throw unprocessable([issue(["surveyId"], "survey-of-other-site")]);
  }
  if (!actor.isAt(siteId, "officer")) throw forbidden();
  return findVisible(Site, sitePolicy, siteId, actor);
}

/** The run that the caller saw, locked; 412 with what another has made of it meanwhile. */
async function seenRun(actor: Actor, id: string, ifMatch: number): Promise<Run> {
  const run = await findVisible(Run, runPolicy, id, actor, { lock: true });
  authorize(runPolicy, actor, "correct", run);
  if (run.revision !== ifMatch) throw stale(await runView(actor, run));
  return run;
}

export function defineOutingRoutes(): void {
  endpoint.get(
    "/sites/:id/outings",
    {
      summary: "A site's instruments on a day: who has which, and what came back",
      may: may.readMeasuring,
      params: IdParams,
      query: OutingQuery,
      reply: OutingBoard,
    },
    async ({ actor, params, query }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor);
      if (!actor.isAt(site.id, "officer", "auditor")) throw forbidden();
      const { change } = abilities(surveyPolicy, actor, { siteId: site.id });
      return outingBoard(site, query.date ?? todayAt(site.timeZone), { change });
    },
  );

  endpoint.post(
    "/outings",
    {
      summary: "An instrument goes out; of a day gone by, with its return",
      may: may.officer,
      body: OutingStart,
      reply: RunView,
    },
    async ({ actor, body }) => {
      // Locked: whoever sends the same instrument out at the same moment is told who was first.
      const instrument = await findVisible(Instrument, programmePolicy, body.instrumentId, actor, {
        lock: true,
      });
      const site = await siteOfOuting(actor, body);
      const { back, workerId, date } = body;
      if (back === null) return view(actor, await startOuting(actor, site, instrument, body));
      const entryId = randomUUID();
      const id = await recordOuting(actor, site, instrument, { ...body, back }, entryId);
      if (workerId) await recomputeRunDay(actor, { siteId: site.id, workerId, date, entryId });
      return view(actor, id);
    },
  );

  endpoint.post(
    "/runs/:id/back",
    {
      summary: "An instrument is back, with what was read off it",
      may: may.officer,
      params: IdParams,
      body: OutingReturn,
      reply: RunView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const run = await seenRun(actor, params.id, ifMatch);
      const site = await findVisible(Site, sitePolicy, run.siteId, actor);
      const entryId = randomUUID();
      await endOuting(actor, run, site, body, entryId);
      const { siteId, workerId, date } = run;
      if (workerId) await recomputeRunDay(actor, { siteId, workerId, date, entryId });
      return view(actor, run.id);
    },
  );

  endpoint.post(
    "/runs/:id/undo-out",
    {
      summary: "Take back a going out that was a mistake, with the reason",
      may: may.officer,
      params: IdParams,
      body: OutingUndo,
      reply: RunView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const run = await seenRun(actor, params.id, ifMatch);
      await undoOuting(actor, run, body);
      return view(actor, run.id);
    },
  );
}
