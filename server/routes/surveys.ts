import { AtSiteQuery, IdParams } from "../../shared/schemas/common";
import { ChangePreview } from "../../shared/schemas/site";
import {
  MeasuringNeeds,
  RemeasureInput,
  SurveyAdoption,
  SurveyChange,
  SurveyDetail,
  SurveyFilter,
  SurveyInput,
  SurveyPage,
  SurveyPlan,
  SurveyPlanQuery,
  SurveyStateChange,
} from "../../shared/schemas/survey";
import { adoptSurvey, insertAdoptedLevels } from "../commands/adopt-survey";
import { changeSurvey } from "../commands/change-survey";
import { createSurvey } from "../commands/create-survey";
import { previewChange } from "../commands/preview-change";
import { setRemeasureInterval } from "../commands/set-remeasure-interval";
import { setSurveyState } from "../commands/set-survey-state";
import { endpoint } from "../lib/endpoint";
import { issue, unprocessable } from "../lib/errors";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Site } from "../models/site";
import { Survey } from "../models/survey";
import { Job, Task } from "../models/task";
import { may, programmePolicy, sitePolicy, surveyPolicy } from "../policies";
import { measuringNeeds, remeasuring } from "../queries/measuring-needs";
import { planSurvey } from "../queries/survey-plan";
import { listSurveys, surveyDetail, surveyHead } from "../queries/surveys";

/** A look needs no reason yet. */
const PREVIEW = "preview";

/** The job, if it is one of the site that this actor may plan surveys for. */
async function jobToMeasure(actor: Actor, siteId: string, jobId: string): Promise<Job> {
  const site = await findVisible(Site, sitePolicy, siteId, actor);
  authorize(surveyPolicy, actor, "change", { siteId: site.id });
  const job = await findVisible(Job, programmePolicy, jobId, actor);
  if (job.siteId !== site.id) throw unprocessable([issue(["jobId"], "job-of-other-site")]);
  return job;
}

async function surveyToChange(actor: Actor, id: string): Promise<Survey> {
  const survey = await findVisible(Survey, surveyPolicy, id, actor, { lock: true });
  authorize(surveyPolicy, actor, "change", survey);
  return survey;
}

/** The tasks whose levels a survey's results become, locked in one order. */
async function tasksToAdopt(
  actor: Actor,
  { targets }: Pick<SurveyAdoption, "targets">,
): Promise<Task[]> {
  const tasks: Task[] = [];
  for (const id of [...new Set(targets.map(({ taskId }) => taskId))].sort())
    tasks.push(await findVisible(Task, programmePolicy, id, actor, { lock: true }));
  return tasks;
}

export function defineSurveyRoutes(): void {
  endpoint.get(
    "/measuring-needs",
    {
      summary: "Which groups want measuring, and why, the worst first",
      may: may.readMeasuring,
      query: AtSiteQuery,
      reply: MeasuringNeeds,
    },
    ({ actor, query }) => measuringNeeds(actor, query.siteId ?? null),
  );

  endpoint.put(
    "/sites/:id/remeasuring",
    {
      summary: "After how many months a level at a site counts as measured too long ago",
      may: may.officer,
      params: IdParams,
      body: RemeasureInput,
      reply: MeasuringNeeds.shape.sites.element,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor, { lock: true });
      authorize(sitePolicy, actor, "changeRules", site);
      const before = only(await remeasuring(actor, site.id));
      await requireRevision(site, ifMatch, async () => before);
      await setRemeasureInterval(
        actor,
        site,
        before.remeasureAfterMonths,
        body.remeasureAfterMonths,
      );
      return only(await remeasuring(actor, site.id));
    },
  );

  endpoint.get(
    "/survey-plan",
    {
      summary: "What the standard asks of a survey of a group, and a draw of whom to measure",
      may: may.officer,
      query: SurveyPlanQuery,
      reply: SurveyPlan,
    },
    async ({ actor, query }) =>
      planSurvey(await jobToMeasure(actor, query.siteId, query.jobId), query),
  );

  endpoint.get(
    "/surveys",
    {
      summary: "Surveys, the latest first",
      may: may.readMeasuring,
      query: SurveyFilter,
      reply: SurveyPage,
    },
    ({ actor, query }) => listSurveys(actor, query),
  );

  endpoint.get(
    "/surveys/:id",
    {
      summary: "A survey: what is wanted against what is there, and what it comes to",
      may: may.readMeasuring,
      params: IdParams,
      reply: SurveyDetail,
    },
    async ({ actor, params }) => {
      const survey = await findVisible(Survey, surveyPolicy, params.id, actor);
      return surveyDetail(actor, survey.id);
    },
  );

  endpoint.post(
    "/surveys",
    { summary: "Plan a survey", may: may.officer, body: SurveyInput, reply: SurveyDetail },
    async ({ actor, body }) => {
      await jobToMeasure(actor, body.siteId, body.jobId);
      const survey = await createSurvey(actor, body);
      return surveyDetail(actor, survey.id);
    },
  );

  endpoint.put(
    "/surveys/:id",
    {
      summary: "Change a survey's plan",
      may: may.officer,
      params: IdParams,
      body: SurveyChange,
      reply: SurveyDetail,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const survey = await surveyToChange(actor, params.id);
      await requireRevision(survey, ifMatch, () => surveyDetail(actor, survey.id));
      const { head } = await surveyHead(survey.id);
      await changeSurvey(actor, survey, SurveyChange.parse(head), body);
      return surveyDetail(actor, survey.id);
    },
  );

  endpoint.post(
    "/surveys/:id/state",
    {
      summary: "Begin measuring, finish, take up again or strike a survey",
      may: may.officer,
      params: IdParams,
      body: SurveyStateChange,
      reply: SurveyDetail,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const survey = await surveyToChange(actor, params.id);
      await requireRevision(survey, ifMatch, () => surveyDetail(actor, survey.id));
      await setSurveyState(actor, survey, body);
      return surveyDetail(actor, survey.id);
    },
  );

  endpoint.post(
    "/surveys/:id/adoption/preview",
    {
      summary: "Who would change verdict if a survey's results became its tasks' levels",
      may: may.officer,
      params: IdParams,
      body: SurveyAdoption.omit({ reason: true }),
      reply: ChangePreview,
      storesNothing: true,
    },
    async ({ actor, params, body }) => {
      const survey = await surveyToChange(actor, params.id);
      const tasks = await tasksToAdopt(actor, body);
      return previewChange(
        actor,
        { taskIds: tasks.map(({ id }) => id), fromDate: body.effectiveFrom },
        () => insertAdoptedLevels(actor, survey, tasks, { ...body, reason: PREVIEW }),
      );
    },
  );

  endpoint.post(
    "/surveys/:id/adoption",
    {
      summary: "A survey's results become the levels of its tasks",
      may: may.officer,
      params: IdParams,
      body: SurveyAdoption,
      reply: SurveyDetail,
    },
    async ({ actor, params, body }) => {
      const survey = await surveyToChange(actor, params.id);
      await adoptSurvey(actor, survey, await tasksToAdopt(actor, body), body);
      return surveyDetail(actor, survey.id);
    },
  );
}
