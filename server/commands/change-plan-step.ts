import { randomUUID } from "node:crypto";
import type {
  PlanStepChange,
  PlanStepInput,
  PlanStepMark,
  PlanStepView,
} from "../../shared/schemas/plan";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { changesBetween, isUnchanged } from "../lib/changes";
import { execute, row } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Finding } from "../models/finding";
import type { Plan } from "../models/plan";
import { findMeasure } from "../queries/follow-up";
import { stepOwners } from "../queries/plan-steps";
import { changeMeasure } from "./change-measure";
import { recordMeasure } from "./record-measure";

async function checkStep(plan: Plan, { ownerId, dueOn }: PlanStepChange): Promise<void> {
  const issues = dateIssues(["dueOn"], dueOn, 3660);
  if (ownerId !== null && !(await stepOwners(plan.siteId)).some(({ id }) => id === ownerId))
    issues.push(issue(["ownerId"], "not-of-this-site"));
  if (issues.length > 0) throw unprocessable(issues);
}

const refuseAside = (plan: Plan) => {
  if (plan.putAsideReason !== null) throw new AppError("plan-put-aside-already", 409);
};

/**
 * One thing to do for a plan, by somebody until a day. Where it is to mend a finding, it becomes that finding's measure too.
 * The finding's row is locked.
 *
 * @throws AppError invalid; plan-put-aside-already; finding-closed
 */
export async function addPlanStep(
  actor: Actor,
  plan: Plan,
  { mends, ...step }: PlanStepInput,
  finding: Finding | null,
): Promise<void> {
  refuseAside(plan);
  await checkStep(plan, step);
  if (finding?.state === "closed") throw new AppError("finding-closed", 409);
  const measureId =
    finding && mends
      ? await recordMeasure(actor, finding, {
          control: mends.control,
          what: step.what,
          ownerId: step.ownerId,
          plannedOn: step.dueOn,
          doneOn: null,
        })
      : null;
  const id = randomUUID();
  await execute(
    `INSERT INTO plan_steps (id, organization_id, plan_id, what, owner_id, due_on, measure_id, author_id) VALUES ($1, $2, $3, $4, $5, $6, $7, $8)`,
    [
      id,
      actor.organizationId,
      plan.id,
      step.what,
      step.ownerId,
      step.dueOn,
      measureId,
      actor.userId,
    ],
  );
  await recordAudit(actor, {
    action: "add-plan-step",
    subjectKind: "plan",
    subjectId: plan.id,
    values: { stepId: id, ...step, measureId },
  });
}

/** Another day, another owner, other words. The step's row is locked. */
export async function changePlanStep(
  actor: Actor,
  plan: Plan,
  before: PlanStepView,
  input: PlanStepChange,
): Promise<void> {
  refuseAside(plan);
  const changes = changesBetween(before, input);
  if (isUnchanged(changes)) return;
  await checkStep(plan, input);
  await execute(
    "UPDATE plan_steps SET what = $2, owner_id = $3, due_on = $4, revision = revision + 1 WHERE id = $1",
    [before.id, input.what, input.ownerId, input.dueOn],
  );
  await recordAudit(actor, {
    action: "change-plan-step",
    subjectKind: "plan",
    subjectId: plan.id,
    values: { stepId: before.id, ...changes },
  });
}

/**
 * A step is done, can't be done because…, or is open again. A finding's measure that it is becomes done with it. The step's
 * row and the finding's are locked.
 */
export async function markPlanStep(
  actor: Actor,
  plan: Plan,
  before: PlanStepView,
  { state, reason }: PlanStepMark,
  mended: { finding: Finding; measureId: string } | null,
): Promise<void> {
  refuseAside(plan);
  if (before.state === state) throw new AppError("nothing-to-do", 409);
  const site = await row<{ timeZone: string }>(
    `SELECT time_zone AS "timeZone" FROM sites WHERE id = :id`,
    { id: plan.siteId },
  );
  const today = todayAt(site?.timeZone ?? "UTC");
  await execute(
    "UPDATE plan_steps SET state = $2, marked_on = $3, reason = $4, revision = revision + 1 WHERE id = $1",
    [before.id, state, state === "open" ? null : today, state === "open" ? null : reason],
  );
  const measure = mended && (await findMeasure(mended.finding.id, mended.measureId));
  if (mended && measure?.struckReason === null && (state === "done") !== (measure.doneOn !== null))
    await changeMeasure(actor, mended.finding, measure, {
      control: measure.control,
      what: measure.what,
      ownerId: measure.ownerId,
      plannedOn: measure.plannedOn ?? before.dueOn,
      doneOn: state === "done" ? today : null,
    });
  await recordAudit(actor, {
    action: "mark-plan-step",
    subjectKind: "plan",
    subjectId: plan.id,
    values: { stepId: before.id, state, reason },
  });
}
