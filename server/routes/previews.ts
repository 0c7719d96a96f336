import { IdParams } from "../../shared/schemas/common";
import { ProtectorRevisionInput } from "../../shared/schemas/protector";
import { ChangePreview, RecomputeProgress, SiteSettingsFacts } from "../../shared/schemas/site";
import { TaskLevelInput } from "../../shared/schemas/task";
import { insertProtectorRevision } from "../commands/add-protector-revision";
import { insertSettings } from "../commands/add-site-settings";
import { insertTaskLevel } from "../commands/add-task-level";
import { checkSettings } from "../commands/check-site";
import { checkLevel } from "../commands/check-task";
import { previewChange } from "../commands/preview-change";
import { row } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { authorize, findVisible, visible } from "../lib/policy";
import { ProtectorModel } from "../models/protector";
import { Site } from "../models/site";
import { Task } from "../models/task";
import { dayPolicy, may, programmePolicy, protectorPolicy, sitePolicy } from "../policies";

/** A look needs no reason yet; the row that bears this one is taken back. */
const PREVIEW = "preview";

/** Who changes verdict, before a change that reaches over many days is made. */
export function definePreviewRoutes(): void {
  endpoint.post(
    "/tasks/:id/levels/preview",
    {
      summary: "Who would change verdict with another level of a task",
      may: may.officer,
      params: IdParams,
      body: TaskLevelInput,
      reply: ChangePreview,
      storesNothing: true,
    },
    async ({ actor, params, body }) => {
      const task = await findVisible(Task, programmePolicy, params.id, actor);
      authorize(programmePolicy, actor, "change", task);
      checkLevel(body);
      return previewChange(actor, { taskId: task.id, fromDate: body.effectiveFrom }, () =>
        insertTaskLevel(actor, task, { ...body, reason: PREVIEW }),
      );
    },
  );

  endpoint.post(
    "/protectors/:id/revisions/preview",
    {
      summary: "Who would change verdict with other data of a protector",
      may: may.officer,
      params: IdParams,
      body: ProtectorRevisionInput,
      reply: ChangePreview,
      storesNothing: true,
    },
    async ({ actor, params, body }) => {
      const model = await findVisible(ProtectorModel, protectorPolicy, params.id, actor);
      authorize(protectorPolicy, actor, "change", model);
      return previewChange(actor, { modelId: model.id, fromDate: body.effectiveFrom }, () =>
        insertProtectorRevision(actor, model, { ...body, reason: PREVIEW }),
      );
    },
  );

  endpoint.post(
    "/sites/:id/settings/preview",
    {
      summary: "Who would change verdict under other rules",
      may: may.officer,
      params: IdParams,
      body: SiteSettingsFacts,
      reply: ChangePreview,
      storesNothing: true,
    },
    async ({ actor, params, body }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor);
      authorize(sitePolicy, actor, "changeRules", site);
      checkSettings(body);
      return previewChange(actor, { siteId: site.id, fromDate: body.effectiveFrom }, () =>
        insertSettings(actor, site, { ...body, reason: PREVIEW }),
      );
    },
  );

  endpoint.get(
    "/recompute-progress",
    {
      summary: "How many days wait to be computed again",
      may: may.officer,
      reply: RecomputeProgress,
    },
    async ({ actor }) => {
      const found = await row<{ daysLeft: number }>(
        `SELECT count(*)::int AS "daysLeft" FROM days d WHERE d.organization_id = :organizationId AND d.is_stale AND ${visible(dayPolicy, actor, "d")}`,
        { organizationId: actor.organizationId },
      );
      return { daysLeft: found?.daysLeft ?? 0 };
    },
  );
}
