import type { AssignmentView } from "../../shared/schemas/worker";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { assignmentPolicy } from "../policies";

export type AssignmentRow = AssignmentView;

/** Assignments of a worker, or the ones named, the latest first. */
export async function listAssignments(
  actor: Actor,
  { workerId = null, ids = [] }: { workerId?: string | null; ids?: readonly string[] },
): Promise<AssignmentRow[]> {
  if (workerId === null && ids.length === 0) return [];
  return rows<AssignmentRow>(
    `SELECT a.id, a.worker_id AS "workerId",
       CASE WHEN a.task_id IS NOT NULL THEN 'task' WHEN a.area_id IS NOT NULL THEN 'area' ELSE 'everywhere' END AS use,
       a.task_id AS "taskId", a.area_id AS "areaId", coalesce(t.name, r.name) AS "useName",
       a.inner_model_id AS "innerModelId", i.name AS "innerName", a.outer_model_id AS "outerModelId", o.name AS "outerName",
       a.size, a.audio_db AS "audioDb",
       lower(a.valid)::text AS "fromDate", (upper(a.valid) - 1)::text AS "toDate", a.revision
     FROM assignments a JOIN protector_models i ON i.id = a.inner_model_id LEFT JOIN protector_models o ON o.id = a.outer_model_id
     LEFT JOIN tasks t ON t.id = a.task_id LEFT JOIN areas r ON r.id = a.area_id
     WHERE ${visible(assignmentPolicy, actor, "a")} AND ${workerId === null ? "a.id IN (:ids)" : "a.worker_id = :workerId"}
     ORDER BY lower(a.valid) DESC, "useName" NULLS FIRST, a.id`,
    { workerId, ids },
  );
}
