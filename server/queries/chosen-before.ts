import type { ChosenBefore, ProtectorsToReview } from "../../shared/schemas/workplace-change";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { assignmentPolicy, surveyPolicy } from "../policies";

/**
 * SQL: assignment `a` of worker `w`, in force, was chosen before change `c` on what it changed, and nobody has looked at it
 * since. What is worn everywhere was chosen on all that its wearer's job has.
 */
export const CHOSEN_BEFORE = `a.valid @> current_date AND lower(a.valid) < c.happened_on AND (
    CASE WHEN c.task_id IS NOT NULL THEN
        a.task_id = c.task_id OR a.area_id = (SELECT t.area_id FROM tasks t WHERE t.id = c.task_id)
        OR a.task_id IS NULL AND a.area_id IS NULL AND EXISTS (SELECT 1 FROM job_tasks n WHERE n.job_id = w.job_id AND n.task_id = c.task_id)
      WHEN c.area_id IS NOT NULL THEN
        a.area_id = c.area_id OR EXISTS (SELECT 1 FROM tasks t WHERE t.id = a.task_id AND t.area_id = c.area_id)
        OR a.task_id IS NULL AND a.area_id IS NULL AND EXISTS (SELECT 1 FROM job_tasks n JOIN tasks t ON t.id = n.task_id
          WHERE n.job_id = w.job_id AND t.area_id = c.area_id)
      ELSE w.job_id = c.job_id END)
  AND NOT EXISTS (SELECT 1 FROM protectors_looked_at k WHERE k.change_id = c.id AND k.assignment_id = a.id)`;

/** Changes after which protectors wait for another look, the latest first. */
export async function protectorsToReview(
  actor: Actor,
  siteId: string | null,
): Promise<ProtectorsToReview> {
  return rows(
    `SELECT c.id AS "changeId", c.site_id AS "siteId", coalesce(r.name, t.name, j.name) AS "subjectName", c.kind, c.what,
       c.happened_on::text AS "happenedOn", x.count AS "assignmentsCount"
     FROM workplace_changes c LEFT JOIN areas r ON r.id = c.area_id LEFT JOIN tasks t ON t.id = c.task_id LEFT JOIN jobs j ON j.id = c.job_id
     JOIN LATERAL (SELECT count(*)::int AS count FROM assignments a JOIN workers w ON w.id = a.worker_id
       WHERE w.site_id = c.site_id AND ${CHOSEN_BEFORE}) x ON x.count > 0
     WHERE c.struck_reason IS NULL AND ${visible(surveyPolicy, actor, "c")} AND (CAST(:siteId AS uuid) IS NULL OR c.site_id = :siteId)
     ORDER BY c.happened_on DESC, c.id`,
    { siteId },
  );
}

/** The protectors that were chosen before a change and wait for another look, by worker. */
export async function chosenBefore(actor: Actor, changeId: string): Promise<ChosenBefore["rows"]> {
  return rows(
    `SELECT a.id, a.worker_id AS "workerId", w.name AS "workerName", w.employee_number AS "employeeNumber",
       coalesce(t.name, r.name) AS "useName", i.name AS "innerName", o.name AS "outerName", lower(a.valid)::text AS "fromDate"
     FROM workplace_changes c JOIN workers w ON w.site_id = c.site_id JOIN assignments a ON a.worker_id = w.id
     JOIN protector_models i ON i.id = a.inner_model_id LEFT JOIN protector_models o ON o.id = a.outer_model_id
     LEFT JOIN tasks t ON t.id = a.task_id LEFT JOIN areas r ON r.id = a.area_id
     WHERE c.id = :changeId AND c.struck_reason IS NULL AND ${CHOSEN_BEFORE} AND ${visible(assignmentPolicy, actor, "a")}
     ORDER BY w.name, a.id`,
    { changeId },
  );
}
