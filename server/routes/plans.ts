import { IdParams } from "../../shared/schemas/common";
import {
  PlanFilter,
  PlanInput,
  PlanPage,
  PlanPutAside,
  PlanScope,
  PlanView,
  TrySubject,
} from "../../shared/schemas/plan";
import { keepPlan, putPlanAside } from "../commands/keep-plan";
import { endpoint } from "../lib/endpoint";
import { authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Plan } from "../models/plan";
import { may, planPolicy } from "../policies";
import { listPlans, planView } from "../queries/plans";
import { trySubject } from "../queries/try-subject";

export function definePlanRoutes(): void {
  endpoint.get(
    "/try-changes",
    {
      summary: "The nominal days of a worker, a group or an area, for changes to be tried on",
      may: may.officer,
      query: PlanScope,
      reply: TrySubject,
    },
    ({ actor, query }) => trySubject(actor, query),
  );

  endpoint.get(
    "/plans",
    {
      summary: "Plans that were kept, the latest first",
      may: may.readFitting,
      query: PlanFilter,
      reply: PlanPage,
    },
    ({ actor, query }) => listPlans(actor, query),
  );

  endpoint.get(
    "/plans/:id",
    {
      summary: "A plan, what it was expected to do and what has been found since",
      may: may.readFitting,
      params: IdParams,
      reply: PlanView,
    },
    async ({ actor, params }) => {
      const plan = await findVisible(Plan, planPolicy, params.id, actor);
      return planView(actor, plan.id);
    },
  );

  endpoint.post(
    "/plans",
    {
      summary: "Keep changes as a plan, computed anew",
      may: may.officer,
      body: PlanInput,
      reply: PlanView,
    },
    async ({ actor, body }) => {
      const subject = await trySubject(actor, body);
      authorize(planPolicy, actor, "keep", subject.scope);
      return planView(actor, await keepPlan(actor, subject, body));
    },
  );

  endpoint.post(
    "/plans/:id/put-aside",
    {
      summary: "Follow a plan no more",
      may: may.officer,
      params: IdParams,
      body: PlanPutAside,
      reply: PlanView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const plan = await findVisible(Plan, planPolicy, params.id, actor, { lock: true });
      authorize(planPolicy, actor, "putAside", plan);
      await requireRevision(plan, ifMatch, () => planView(actor, plan.id));
      await putPlanAside(actor, plan, body.reason);
      return planView(actor, plan.id);
    },
  );
}
