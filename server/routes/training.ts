import { IdParams } from "../../shared/schemas/common";
import {
  TrainingDuePage,
  TrainingFilter,
  TrainingInput,
  TrainingPage,
  TrainingStrike,
  TrainingView,
  WorkerTraining,
} from "../../shared/schemas/training";
import { changeTraining } from "../commands/change-training";
import { recordTraining } from "../commands/record-training";
import { strikeTraining } from "../commands/strike-training";
import { endpoint } from "../lib/endpoint";
import { notFound } from "../lib/errors";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Site } from "../models/site";
import { TrainingSession } from "../models/training";
import { Worker } from "../models/worker";
import { may, sitePolicy, trainingPolicy, workerPolicy } from "../policies";
import { visibleFiles } from "../queries/files";
import { listTrainingDues, listTrainings, trainingView, workerTraining } from "../queries/training";

/** Material may be what this person may have, and nothing else. */
async function checkMaterial(actor: Actor, fileId: string | null): Promise<void> {
  if (fileId !== null && (await visibleFiles(actor, [fileId])).length === 0) throw notFound();
}

export function defineTrainingRoutes(): void {
  endpoint.get(
    "/trainings",
    {
      summary: "Trainings that were held, the latest first",
      may: may.readFitting,
      query: TrainingFilter,
      reply: TrainingPage,
    },
    ({ actor, query }) => listTrainings(actor, query),
  );

  endpoint.get(
    "/trainings/:id",
    {
      summary: "A training with who was there",
      may: may.readFitting,
      params: IdParams,
      reply: TrainingView,
    },
    async ({ actor, params }) => {
      const session = await findVisible(TrainingSession, trainingPolicy, params.id, actor);
      return trainingView(actor, session.id);
    },
  );

  endpoint.get(
    "/training-dues",
    {
      summary: "Who is owed training by the rules of the site, longest overdue first",
      may: may.readFitting,
      query: TrainingFilter,
      reply: TrainingDuePage,
    },
    ({ actor, query }) => listTrainingDues(actor, query),
  );

  endpoint.get(
    "/workers/:id/training",
    {
      summary: "A worker's trainings, and when the next is due",
      may: may.readDays,
      params: IdParams,
      reply: WorkerTraining,
      reads: { kind: "training", worker: ({ params }) => params.id },
    },
    async ({ actor, params }) => {
      const worker = await findVisible(Worker, workerPolicy, params.id, actor);
      return workerTraining(actor, worker.id);
    },
  );

  endpoint.post(
    "/trainings",
    {
      summary: "Enter a training that was held, with who was there",
      may: may.officer,
      body: TrainingInput,
      reply: TrainingView,
    },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(trainingPolicy, actor, "change", { siteId: site.id });
      await checkMaterial(actor, body.fileId);
      return trainingView(actor, await recordTraining(actor, site, body));
    },
  );

  endpoint.put(
    "/trainings/:id",
    {
      summary: "Put a training right, who was there as well",
      may: may.officer,
      params: IdParams,
      body: TrainingInput,
      reply: TrainingView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const session = await findVisible(TrainingSession, trainingPolicy, params.id, actor, {
        lock: true,
      });
      authorize(trainingPolicy, actor, "change", session);
      const site = await findVisible(Site, sitePolicy, session.siteId, actor);
      const before = await trainingView(actor, session.id);
      await requireRevision(session, ifMatch, async () => before);
      if (body.fileId !== before.fileId) await checkMaterial(actor, body.fileId);
      await changeTraining(actor, site, before, body);
      return trainingView(actor, session.id);
    },
  );

  endpoint.post(
    "/trainings/:id/strike",
    {
      summary: "Strike a training entered by mistake, with the reason",
      may: may.officer,
      params: IdParams,
      body: TrainingStrike,
      reply: TrainingView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const session = await findVisible(TrainingSession, trainingPolicy, params.id, actor, {
        lock: true,
      });
      authorize(trainingPolicy, actor, "change", session);
      await requireRevision(session, ifMatch, () => trainingView(actor, session.id));
      await strikeTraining(actor, session, body.reason);
      return trainingView(actor, session.id);
    },
  );
}
