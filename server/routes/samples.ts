import { SampleInput } from "../../shared/schemas/outing";
import { RunView } from "../../shared/schemas/run";
import { recordSample } from "../commands/record-sample";
import { endpoint } from "../lib/endpoint";
import { forbidden, issue, notFound, unprocessable } from "../lib/errors";
import { findVisible } from "../lib/policy";
import { Instrument, Run } from "../models/instrument";
import { Site } from "../models/site";
import { Survey } from "../models/survey";
import { Task } from "../models/task";
import { Worker } from "../models/worker";
import {
  may,
  programmePolicy,
  runPolicy,
  sitePolicy,
  surveyPolicy,
  workerPolicy,
} from "../policies";
import { visibleFiles } from "../queries/files";
import { runView } from "../queries/run-view";

export function defineSampleRoutes(): void {
  endpoint.post(
    "/samples",
    {
      summary: "Record a sample taken by hand at a task",
      may: may.officer,
      body: SampleInput,
      reply: RunView,
    },
    async ({ actor, body }) => {
      const task = await findVisible(Task, programmePolicy, body.taskId, actor);
      const instrument = await findVisible(Instrument, programmePolicy, body.instrumentId, actor);
      if (!actor.isAt(task.siteId, "officer")) throw forbidden();
      if (body.workerId) {
        const worker = await findVisible(Worker, workerPolicy, body.workerId, actor);
        if (worker.siteId !== task.siteId)
          throw unprocessable([issue(["workerId"], "worker-of-other-site")]);
      }
      if (body.surveyId) {
        const survey = await findVisible(Survey, surveyPolicy, body.surveyId, actor);
        if (survey.siteId !== task.siteId)
          throw unprocessable([issue(["surveyId"], "survey-of-other-site")]);
      }
      const files = await visibleFiles(actor, body.fileIds);
      if (files.length < new Set(body.fileIds).size) throw notFound();
      const site = await findVisible(Site, sitePolicy, task.siteId, actor);
      const id = await recordSample(actor, site, instrument, body);
      return runView(actor, await findVisible(Run, runPolicy, id, actor));
    },
  );
}
