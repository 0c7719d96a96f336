import { randomUUID } from "node:crypto";
import type { KeptTimetable, TimetableView } from "../../shared/schemas/timetable";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";

/**
 * A timetable that was found becomes a plan, as it stands: with what it rested on and what the engine made of it.
 *
 * @throws AppError wrong-state where there is none, or it is a plan already
 */
export async function keepTimetable(
  actor: Actor,
  view: Omit<TimetableView, "can">,
  name: string,
): Promise<string> {
  const { answer, request, basis, scope } = view;
  if (answer?.kind !== "timetable" || view.planId !== null) throw new AppError("wrong-state", 409);
  const { outcome, ...found } = answer;
  const kept: KeptTimetable = { request, basis, found };
  const id = randomUUID();
  await execute(
    `INSERT INTO plans (id, organization_id, site_id, name, kind, scope_kind, scope_id, base_date, governing_rule_set, governing_version, method_version, goal, changes, timetable, outcome, author_id)
     VALUES ($1, $2, $3, $4, 'timetable', $5, $6, $7, $8, $9, $10, $11, '[]', $12::jsonb, $13::jsonb, $14)`,
    [
      id,
      actor.organizationId,
      scope.siteId,
      name,
      scope.scopeKind,
      scope.scopeId,
      view.baseDate,
      view.ruleSetKey,
      view.ruleSetVersion,
      view.methodVersion,
      request.goal,
      JSON.stringify(kept),
      JSON.stringify(outcome),
      actor.userId,
    ],
  );
  await execute("UPDATE timetables SET plan_id = $2, revision = revision + 1 WHERE id = $1", [
    view.id,
    id,
  ]);
  await recordAudit(actor, {
    action: "keep-plan",
    subjectKind: "plan",
    subjectId: id,
    values: { name, timetableId: view.id, ...request },
  });
  return id;
}
