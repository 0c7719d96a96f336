import { z } from "zod";
import { IdParams } from "../../shared/schemas/common";
import {
  PlanFilter,
  PlanInput,
  PlanPage,
  PlanPutAside,
  PlanScope,
  PlanStepChange,
  PlanStepInput,
  PlanStepMark,
  PlanView,
  TrySubject,
} from "../../shared/schemas/plan";
import { addPlanStep, changePlanStep, markPlanStep } from "../commands/change-plan-step";
import { keepPlan, putPlanAside } from "../commands/keep-plan";
import { timetableCsv } from "../exports/timetable-csv";
import { endpoint } from "../lib/endpoint";
import { notFound } from "../lib/errors";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Finding } from "../models/finding";
import { Plan } from "../models/plan";
import { findingPolicy, may, planPolicy } from "../policies";
import { findStep } from "../queries/plan-steps";
import { listPlans, planView } from "../queries/plans";
import { trySubject } from "../queries/try-subject";

const StepParams = IdParams.extend({ stepId: z.uuid() });

/** A finding that this officer may act on, locked. */
async function findingToMend(actor: Actor, id: string): Promise<Finding> {
  const finding = await findVisible(Finding, findingPolicy, id, actor, { lock: true });
  authorize(findingPolicy, actor, "handle", finding);
  return finding;
}

/** The plan and one of its steps, locked, where this actor may act on it. */
async function stepToChange(actor: Actor, { id, stepId }: z.output<typeof StepParams>) {
  const plan = await findVisible(Plan, planPolicy, id, actor);
  authorize(planPolicy, actor, "step", plan);
  const found = await findStep(plan.id, stepId);
  if (!found) throw notFound();
  return { plan, ...found };
}

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

  endpoint.get(
    "/plans/:id/timetable.csv",
    {
      summary: "Who goes where when, by a plan that is a timetable",
      may: may.readFitting,
      params: IdParams,
    },
    async ({ actor, params, response }) => {
      const plan = await findVisible(Plan, planPolicy, params.id, actor);
      const { timetable } = await planView(actor, plan.id);
      if (!timetable) throw notFound();
      response
        .attachment(`timetable-${plan.baseDate}.csv`)
        .type("text/csv; charset=utf-8; header=present")
        .send(timetableCsv(timetable));
    },
  );

  endpoint.post(
    "/plans/:id/steps",
    {
      summary: "A thing to do for a plan, by somebody until a day",
      may: may.officer,
      params: IdParams,
      body: PlanStepInput,
      reply: PlanView,
    },
    async ({ actor, params, body }) => {
      const plan = await findVisible(Plan, planPolicy, params.id, actor);
      authorize(planPolicy, actor, "step", plan);
      const finding = body.mends && (await findingToMend(actor, body.mends.findingId));
      await addPlanStep(actor, plan, body, finding);
      return planView(actor, plan.id);
    },
  );

  endpoint.put(
    "/plans/:id/steps/:stepId",
    {
      summary: "A step by another day or owner, or in other words",
      may: may.officer,
      params: StepParams,
      body: PlanStepChange,
      reply: PlanView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const { plan, step } = await stepToChange(actor, params);
      await requireRevision(step, ifMatch, () => planView(actor, plan.id));
      await changePlanStep(actor, plan, step, body);
      return planView(actor, plan.id);
    },
  );

  endpoint.post(
    "/plans/:id/steps/:stepId/mark",
    {
      summary: "A step is done, can't be done because…, or is open again",
      may: may.officer,
      params: StepParams,
      body: PlanStepMark,
      reply: PlanView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const { plan, step, measureId } = await stepToChange(actor, params);
      await requireRevision(step, ifMatch, () => planView(actor, plan.id));
      const mended =
        step.mends && measureId !== null
          ? { finding: await findingToMend(actor, step.mends.findingId), measureId }
          : null;
      await markPlanStep(actor, plan, step, body, mended);
      return planView(actor, plan.id);
    },
  );
}
