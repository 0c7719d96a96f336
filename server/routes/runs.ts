import { randomUUID } from "node:crypto";
import { IdParams } from "../../shared/schemas/common";
import { RunCorrection, RunFilter, RunInput, RunPage, RunView } from "../../shared/schemas/run";
import { recomputeRunDay } from "../commands/recompute-run-day";
import { correctRun, recordRun } from "../commands/record-run";
import { todayAt } from "../lib/calendar";
import { row } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { AppError, forbidden, issue, stale, unprocessable } from "../lib/errors";
import { authorize, findVisible } from "../lib/policy";
import { Instrument, Run } from "../models/instrument";
import { Shift } from "../models/shift";
import { Worker } from "../models/worker";
import { may, programmePolicy, runPolicy, shiftPolicy, workerPolicy } from "../policies";
import { listRuns, runView } from "../queries/run-view";

export function defineRunRoutes(): void {
  endpoint.get(
    "/runs",
    { summary: "Runs, latest first", may: may.listRecords, query: RunFilter, reply: RunPage },
    ({ actor, query }) => listRuns(actor, query),
  );

  endpoint.get(
    "/runs/:id",
    {
      summary: "A run with its readings",
      may: may.readDays,
      params: IdParams,
      reply: RunView,
      reads: { kind: "run", worker: (_, { workerId }) => workerId },
    },
    async ({ actor, params }) =>
      runView(actor, await findVisible(Run, runPolicy, params.id, actor)),
  );

  endpoint.post(
    "/runs",
    { summary: "Record a run with its readings", may: may.officer, body: RunInput, reply: RunView },
    async ({ actor, body }) => {
      const worker = await findVisible(Worker, workerPolicy, body.workerId, actor);
      const instrument = await findVisible(Instrument, programmePolicy, body.instrumentId, actor);
      if (!actor.isAt(worker.siteId, "officer")) throw forbidden();
      if (body.shiftId) {
        const shift = await findVisible(Shift, shiftPolicy, body.shiftId, actor);
        if (shift.workerId !== worker.id || shift.date !== body.date)
          throw unprocessable([issue(["shiftId"], "shift-of-another-day")]);
      }
      const site = await row<{ timeZone: string }>(
        `SELECT time_zone AS "timeZone" FROM sites WHERE id = :id`,
        { id: worker.siteId },
      );
      const today = todayAt(site?.timeZone ?? "UTC");
      if (body.date > today) throw unprocessable([issue(["date"], "in-the-future", { today })]);
      if (body.date < worker.hiredOn)
        throw unprocessable([issue(["date"], "before-hire", { hiredOn: worker.hiredOn })]);
      if (instrument.isArchived || instrument.kind === "calibrator")
        throw unprocessable([issue(["instrumentId"], "instrument-not-for-runs")]);
      const entryId = randomUUID();
      const id = await recordRun(actor, worker.siteId, body, entryId);
      await recomputeRunDay(actor, {
        siteId: worker.siteId,
        workerId: worker.id,
        date: body.date,
        entryId,
      });
      return runView(actor, await findVisible(Run, runPolicy, id, actor));
    },
  );

  endpoint.put(
    "/runs/:id",
    {
      summary: "Correct or strike a run with a reason",
      may: may.officer,
      params: IdParams,
      body: RunCorrection,
      reply: RunView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const run = await findVisible(Run, runPolicy, params.id, actor, { lock: true });
      authorize(runPolicy, actor, "correct", run);
      if (run.revision !== ifMatch) throw stale(await runView(actor, run));
      if (run.isOut) throw new AppError("wrong-state", 409);
      const entryId = randomUUID();
      await correctRun(actor, run, body, entryId);
      const { siteId, workerId, date } = run;
      if (workerId) await recomputeRunDay(actor, { siteId, workerId, date, entryId });
      return runView(actor, await run.reload());
    },
  );
}
