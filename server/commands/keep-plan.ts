import { randomUUID } from "node:crypto";
import { METHOD_VERSION } from "../../shared/acoustics/methods";
import type { RuleSetVersion } from "../../shared/acoustics/types";
import { goalsOf, judgeTried, tryChanges } from "../../shared/planning/try-changes";
import { ruleSetVersion } from "../../shared/rule-sets";
import type { PlanChange, PlanInput, TrySubject } from "../../shared/schemas/plan";
import type { ProblemIssue } from "../../shared/schemas/problem";
import type { PlanOutcome } from "../../shared/schemas/tried";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Plan } from "../models/plan";
import { contextOf } from "../queries/try-subject";

/**
 * Keeps changes with what the engine makes of them today; what a browser showed of them does not count.
 *
 * @throws AppError invalid, where a change speaks of what is not of this scope
 */
export async function keepPlan(
  actor: Actor,
  subject: TrySubject,
  input: PlanInput,
): Promise<string> {
  const governing = ruleSetVersion(subject.ruleSetKey, subject.ruleSetVersion);
  if (!governing) throw new Error("a rule set in force has a version");
  const issues = input.changes.flatMap((change, index) => issuesOf(change, index, subject));
  if (!goalsOf(governing).some(({ id }) => id === input.goal))
    issues.push(issue(["goal"], "criterion-unknown"));
  if (issues.length > 0) throw unprocessable(issues);
  const id = randomUUID();
  const outcome = outcomeOf(subject, input, governing);
  await execute(
    `INSERT INTO plans (id, organization_id, site_id, name, scope_kind, scope_id, base_date, governing_rule_set, governing_version, method_version, goal, changes, outcome, author_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9, $10, $11, $12::jsonb, $13::jsonb, $14)`,
    [
      id,
      actor.organizationId,
      subject.scope.siteId,
      input.name,
      input.scopeKind,
      input.scopeId,
      subject.date,
      governing.key,
      governing.version,
      METHOD_VERSION,
      input.goal,
      JSON.stringify(input.changes),
      JSON.stringify(outcome),
      actor.userId,
    ],
  );
  await recordAudit(actor, {
    action: "keep-plan",
    subjectKind: "plan",
    subjectId: id,
    values: { ...input },
  });
  return id;
}

/** A plan that is followed no more stays readable. @throws AppError plan-put-aside-already */
export async function putPlanAside(actor: Actor, plan: Plan, reason: string): Promise<void> {
  if (plan.putAsideReason !== null) throw new AppError("plan-put-aside-already", 409);
  await execute("UPDATE plans SET put_aside_reason = $2, revision = revision + 1 WHERE id = $1", [
    plan.id,
    reason,
  ]);
  await recordAudit(actor, {
    action: "put-plan-aside",
    subjectKind: "plan",
    subjectId: plan.id,
    values: { reason },
  });
}

function issuesOf(change: PlanChange, index: number, subject: TrySubject): ProblemIssue[] {
  const at = (...path: string[]) => ["changes", index, ...path];
  const tasks = new Map(subject.tasks.map((task) => [task.id, task]));
  const workerIds = new Set(subject.workers.map(({ id }) => id));
  const models = new Set(subject.models.map(({ modelId }) => modelId));
  const found: ProblemIssue[] = [];
  const check = (isKnown: boolean, code: string, ...path: string[]) => {
    if (!isKnown) found.push(issue(at(...path), code));
  };
  if (change.kind === "protector" || change.kind === "wearing")
    check(change.taskId === null || tasks.has(change.taskId), "task-of-other-site", "taskId");
  else check(tasks.has(change.taskId), "task-of-other-site", "taskId");
  if (change.kind === "noise" && change.bandsDb !== null)
    check(tasks.get(change.taskId)?.level?.octaveBandsDb != null, "task-without-bands", "bandsDb");
  if (change.kind === "duration" || change.kind === "rotation") {
    check(tasks.has(change.otherTaskId), "task-of-other-site", "otherTaskId");
    check(change.otherTaskId !== change.taskId, "task-twice", "otherTaskId");
  }
  if (change.kind === "rotation") {
    check(workerIds.has(change.workerId), "worker-not-in-scope", "workerId");
    check(workerIds.has(change.otherWorkerId), "worker-not-in-scope", "otherWorkerId");
    check(change.workerId !== change.otherWorkerId, "worker-twice", "otherWorkerId");
  }
  if (change.kind === "protector") {
    check(models.has(change.innerModelId), "protector-unknown", "innerModelId");
    check(
      change.outerModelId === null || models.has(change.outerModelId),
      "protector-unknown",
      "outerModelId",
    );
    check(
      change.workerIds?.every((id) => workerIds.has(id)) ?? true,
      "worker-not-in-scope",
      "workerIds",
    );
  }
  return found;
}

function outcomeOf(
  subject: TrySubject,
  { changes, goal }: PlanInput,
  governing: RuleSetVersion,
): PlanOutcome {
  const context = contextOf(subject);
  const judge = (made: readonly PlanChange[]) =>
    judgeTried(tryChanges(subject.workers, made, context), governing, goal);
  const before = judge([]);
  const after = judge(changes);
  return {
    workers: subject.workers.map(({ id, name, employeeNumber }, index) => ({
      workerId: id,
      workerName: name,
      employeeNumber,
      before: before[index]!,
      after: after[index]!,
    })),
  };
}
