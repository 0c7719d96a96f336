import type { PlanStepView, PlanView } from "../../shared/schemas/plan";
import { row, rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { findingPolicy, planPolicy } from "../policies";

interface StepRow extends Omit<PlanStepView, "mends"> {
  findingId: string | null;
  control: NonNullable<PlanStepView["mends"]>["control"];
  findingKind: string;
  workerName: string | null;
  measureId: string | null;
}

const SELECT_STEPS = `SELECT k.id, k.what, k.owner_id AS "ownerId", o.name AS "ownerName", k.due_on::text AS "dueOn", k.state,
    k.marked_on::text AS "markedOn", k.reason, k.revision, k.measure_id AS "measureId", m.finding_id AS "findingId", m.control,
    f.kind AS "findingKind", w.name AS "workerName"
  FROM plan_steps k LEFT JOIN users o ON o.id = k.owner_id LEFT JOIN finding_measures m ON m.id = k.measure_id
    LEFT JOIN findings f ON f.id = m.finding_id LEFT JOIN workers w ON w.id = f.worker_id`;

const present = ({
  findingId,
  control,
  findingKind,
  workerName,
  measureId: _,
  ...step
}: StepRow): PlanStepView => ({
  ...step,
  mends: findingId === null ? null : { findingId, control, kind: findingKind, workerName },
});

/** A plan's steps, the next one first. */
export async function stepsOf(planId: string): Promise<PlanStepView[]> {
  const found = await rows<StepRow>(
    `${SELECT_STEPS} WHERE k.plan_id = :planId ORDER BY k.due_on, k.created_at, k.id`,
    { planId },
  );
  return found.map(present);
}

/** One step of a plan, locked, and the measure that it is; null where the plan has no such step. */
export async function findStep(
  planId: string,
  id: string,
): Promise<{ step: PlanStepView; measureId: string | null } | null> {
  const found = await row<StepRow>(
    `${SELECT_STEPS} WHERE k.plan_id = :planId AND k.id = :id FOR UPDATE OF k`,
    { planId, id },
  );
  return found && { step: present(found), measureId: found.measureId };
}

/** Who may have a step of a plan in hand: whoever may mark it, a site's officers. */
export const stepOwners = (siteId: string) =>
  rows<{ id: string; name: string }>(
    `SELECT u.id, u.name FROM users u WHERE u.revoked_at IS NULL AND EXISTS (SELECT 1 FROM role_grants g
       WHERE g.user_id = u.id AND g.role = 'officer' AND g.revoked_at IS NULL AND (g.ends_at IS NULL OR g.ends_at > now())
         AND (g.site_id IS NULL OR g.site_id = :siteId)) ORDER BY u.name, u.id`,
    { siteId },
  );

const FINDINGS_AT_MOST = 50;

/** Open findings of people, which a step may mend. */
export const findingsToMend = (
  actor: Actor,
  workerIds: readonly string[],
): Promise<PlanView["findings"]> =>
  rows(
    `SELECT f.id, f.kind, w.name AS "workerName" FROM findings f JOIN workers w ON w.id = f.worker_id
     WHERE f.worker_id = ANY (CAST(:ids AS uuid[])) AND f.state <> 'closed' AND ${visible(findingPolicy, actor, "f")}
     ORDER BY w.name, f.kind, f.id LIMIT ${FINDINGS_AT_MOST}`,
    { ids: `{${workerIds.join(",")}}` },
  );

/** Open steps in this person's hands that are due within two weeks, of plans that are followed. */
export const ownStepsDue = (
  actor: Actor,
  siteId: string | undefined,
): Promise<{ id: string; planId: string; what: string; dueOn: string }[]> =>
  rows(
    `SELECT k.id, k.plan_id AS "planId", k.what, k.due_on::text AS "dueOn" FROM plan_steps k JOIN plans p ON p.id = k.plan_id
     WHERE k.state = 'open' AND k.owner_id = :userId AND k.due_on <= current_date + 14 AND p.put_aside_reason IS NULL
       AND ${visible(planPolicy, actor, "p")} ${siteId ? "AND p.site_id = :siteId" : ""}
     ORDER BY k.due_on, k.created_at, k.id LIMIT 20`,
    { userId: actor.userId, siteId },
  );
