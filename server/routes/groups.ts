import { IdParams } from "../../shared/schemas/common";
import { GroupQuery, GroupView } from "../../shared/schemas/group";
import { endpoint } from "../lib/endpoint";
import { forbidden } from "../lib/errors";
import { findVisible } from "../lib/policy";
import { Survey } from "../models/survey";
import { Job } from "../models/task";
import { may, programmePolicy, surveyPolicy } from "../policies";
import { groupView } from "../queries/group-statistics";

export function defineGroupRoutes(): void {
  endpoint.get(
    "/groups/:id",
    {
      summary: "A group: the workers of a job, its result with its uncertainty, and its statistics",
      may: may.readMeasuring,
      params: IdParams,
      query: GroupQuery,
      reply: GroupView,
    },
    async ({ actor, params, query }) => {
      const job = await findVisible(Job, programmePolicy, params.id, actor);
      // A supervisor's grant shows the job; its people's exposures are the officer's and the auditor's.
      if (!actor.isAt(job.siteId, "officer", "auditor")) throw forbidden();
      if (query.surveyId) await findVisible(Survey, surveyPolicy, query.surveyId, actor);
      return groupView(actor, job, query.surveyId ?? null);
    },
  );
}
