import type { z } from "zod";
import type { JobView } from "../../shared/schemas/task";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { programmePolicy } from "../policies";

export type JobRow = Omit<z.infer<typeof JobView>, "can">;

/** Jobs with their nominal day and how many hold them. */
export async function listJobs(
  actor: Actor,
  { id = null, siteId = null }: { id?: string | null; siteId?: string | null },
): Promise<JobRow[]> {
  return rows<JobRow>(
    `SELECT j.id, j.site_id AS "siteId", j.name, j.is_archived AS "isArchived", j.revision,
       coalesce((SELECT json_agg(json_build_object('taskId', t.task_id, 'durationMin', t.duration_min) ORDER BY t.position)
                 FROM job_tasks t WHERE t.job_id = j.id), '[]') AS tasks,
       (SELECT count(*)::int FROM workers w WHERE w.job_id = j.id AND (w.left_on IS NULL OR w.left_on >= current_date)) AS "workersCount"
     FROM jobs j WHERE ${visible(programmePolicy, actor, "j")}
       AND (CAST(:id AS uuid) IS NULL OR j.id = :id) AND (CAST(:siteId AS uuid) IS NULL OR j.site_id = :siteId)
     ORDER BY j.is_archived, j.name, j.id`,
    { id, siteId },
  );
}
