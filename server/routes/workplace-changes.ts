import { IdParams } from "../../shared/schemas/common";
import {
  ChosenBefore,
  ProtectorsLookedAt,
  WorkplaceChangeFilter,
  WorkplaceChangeInput,
  WorkplaceChangePage,
  WorkplaceChangeStrike,
  WorkplaceChangeView,
} from "../../shared/schemas/workplace-change";
import { lookAtProtectors } from "../commands/look-at-protectors";
import { recordWorkplaceChange } from "../commands/record-workplace-change";
import { strikeWorkplaceChange } from "../commands/strike-workplace-change";
import { endpoint } from "../lib/endpoint";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Area, Site } from "../models/site";
import { WorkplaceChange } from "../models/survey";
import { Job, Task } from "../models/task";
import { may, programmePolicy, sitePolicy, surveyPolicy } from "../policies";
import { chosenBefore } from "../queries/chosen-before";
import { listWorkplaceChanges, workplaceChangeView } from "../queries/workplace-changes";

/** What the change was made to: an area, a task or a job of its own site. */
async function subjectOf(actor: Actor, { areaId, taskId, jobId }: WorkplaceChangeInput) {
  if (areaId) {
    const { siteId } = await findVisible(Area, programmePolicy, areaId, actor);
    return { field: "areaId" as const, siteId };
  }
  if (taskId) {
    const { siteId } = await findVisible(Task, programmePolicy, taskId, actor);
    return { field: "taskId" as const, siteId };
  }
  const { siteId } = await findVisible(Job, programmePolicy, jobId ?? "", actor);
  return { field: "jobId" as const, siteId };
}

const chosenBeforeView = async (actor: Actor, id: string) => ({
  change: await workplaceChangeView(actor, id),
  rows: await chosenBefore(actor, id),
});

export function defineWorkplaceChangeRoutes(): void {
  endpoint.get(
    "/workplace-changes",
    {
      summary: "Changes to process, machine, control or pattern of work, the latest first",
      may: may.readMeasuring,
      query: WorkplaceChangeFilter,
      reply: WorkplaceChangePage,
    },
    ({ actor, query }) => listWorkplaceChanges(actor, query),
  );

  endpoint.post(
    "/workplace-changes",
    {
      summary: "Enter a change: it re-opens monitoring, and the protectors chosen on it",
      may: may.officer,
      body: WorkplaceChangeInput,
      reply: WorkplaceChangeView,
    },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(surveyPolicy, actor, "change", { siteId: site.id });
      const subject = await subjectOf(actor, body);
      const change = await recordWorkplaceChange(actor, site, subject, body);
      return workplaceChangeView(actor, change.id);
    },
  );

  endpoint.get(
    "/workplace-changes/:id/protectors",
    {
      summary: "Protectors chosen before a change, at which nobody has looked since",
      may: may.readMeasuring,
      params: IdParams,
      reply: ChosenBefore,
    },
    async ({ actor, params }) => {
      const change = await findVisible(WorkplaceChange, surveyPolicy, params.id, actor);
      return chosenBeforeView(actor, change.id);
    },
  );

  endpoint.post(
    "/workplace-changes/:id/protectors",
    {
      summary: "Protectors chosen before a change were looked at, and are still right",
      may: may.officer,
      params: IdParams,
      body: ProtectorsLookedAt,
      reply: ChosenBefore,
      status: 200,
    },
    async ({ actor, params, body }) => {
      const change = await findVisible(WorkplaceChange, surveyPolicy, params.id, actor, {
        lock: true,
      });
      authorize(surveyPolicy, actor, "change", change);
      await lookAtProtectors(actor, change, body.assignmentIds);
      return chosenBeforeView(actor, change.id);
    },
  );

  endpoint.post(
    "/workplace-changes/:id/strike",
    {
      summary: "Strike an entry made by mistake, with the reason",
      may: may.officer,
      params: IdParams,
      body: WorkplaceChangeStrike,
      reply: WorkplaceChangeView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const change = await findVisible(WorkplaceChange, surveyPolicy, params.id, actor, {
        lock: true,
      });
      authorize(surveyPolicy, actor, "change", change);
      await requireRevision(change, ifMatch, () => workplaceChangeView(actor, change.id));
      await strikeWorkplaceChange(actor, change, body.reason);
      return workplaceChangeView(actor, change.id);
    },
  );
}
