import type { JobInput } from "../../shared/schemas/task";
import { execute, rows } from "../lib/db";
import { issue, notFound, unprocessable } from "../lib/errors";
import { type Actor, visible } from "../lib/policy";
import type { Job } from "../models/task";
import { programmePolicy } from "../policies";

type NominalDay = JobInput["tasks"];

/** @throws AppError not-found or invalid, unless each task is one of the job's site and named once, within a day. */
export async function checkNominalDay(
  actor: Actor,
  siteId: string,
  tasks: NominalDay,
): Promise<void> {
  if (tasks.length === 0) return;
  const found = await rows<{ id: string; siteId: string }>(
    `SELECT t.id, t.site_id AS "siteId" FROM tasks t WHERE t.id IN (:ids) AND ${visible(programmePolicy, actor, "t")}`,
    { ids: tasks.map(({ taskId }) => taskId) },
  );
  const siteOf = new Map(found.map((task) => [task.id, task.siteId]));
  const ids = tasks.map(({ taskId }) => taskId);
  if (ids.some((id) => !siteOf.has(id))) throw notFound();
  const issues = ids.flatMap((id, index) => [
    ...(siteOf.get(id) === siteId ? [] : [issue(["tasks", index, "taskId"], "task-of-other-site")]),
    ...(ids.indexOf(id) === index ? [] : [issue(["tasks", index, "taskId"], "task-twice")]),
  ]);
  const sumMin = tasks.reduce((sum, { durationMin }) => sum + durationMin, 0);
  if (sumMin > 1440)
    issues.push(issue(["tasks"], "tasks-longer-than-day", { sumMin, overMin: sumMin - 1440 }));
  if (issues.length > 0) throw unprocessable(issues);
}

/** Puts one nominal day in the place of another. */
export async function saveNominalDay(actor: Actor, job: Job, tasks: NominalDay): Promise<void> {
  await execute("DELETE FROM job_tasks WHERE job_id = $1", [job.id]);
  await execute(
    `INSERT INTO job_tasks (organization_id, job_id, task_id, position, duration_min)
     SELECT $1::uuid, $2::uuid, (t.value->>'taskId')::uuid, t.ordinality - 1, (t.value->>'durationMin')::float8
     FROM jsonb_array_elements($3::jsonb) WITH ORDINALITY t`,
    [actor.organizationId, job.id, JSON.stringify(tasks)],
  );
}
