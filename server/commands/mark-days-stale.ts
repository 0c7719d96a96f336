import { execute } from "../lib/db";
import { addJob } from "../lib/jobs";

export interface Concerned {
  fromDate: string;
  siteId?: string;
  taskId?: string;
  taskIds?: readonly string[];
  areaId?: string;
  modelId?: string;
  /** Two models worn together. */
  pair?: { innerModelId: string; outerModelId: string };
  workerId?: string;
  workerIds?: readonly string[];
}

/** SQL: the days `d` whose inputs a change touches; `value` puts a value into the query. */
export function concernedDays(
  { fromDate, siteId, taskId, taskIds, areaId, modelId, pair, workerId, workerIds }: Concerned,
  value: (given: string) => string,
): string {
  const conditions = [`d.date >= CAST(${value(fromDate)} AS date)`];
  if (siteId) conditions.push(`d.site_id = ${value(siteId)}`);
  if (workerId) conditions.push(`d.worker_id = ${value(workerId)}`);
  if (workerIds) conditions.push(`d.worker_id IN (${workerIds.map(value).join(", ")})`);
  const usesTask = (
    of: string,
  ) => `EXISTS (SELECT 1 FROM shifts s JOIN shift_tasks t ON t.shift_revision_id = s.current_revision_id
    ${of} AND s.worker_id = d.worker_id AND s.date = d.date AND NOT s.is_void)`;
  if (taskId) conditions.push(usesTask(`WHERE t.task_id = ${value(taskId)}`));
  if (taskIds) conditions.push(usesTask(`WHERE t.task_id IN (${taskIds.map(value).join(", ")})`));
  if (areaId)
    conditions.push(
      usesTask(`JOIN tasks k ON k.id = t.task_id WHERE k.area_id = ${value(areaId)}`),
    );
  if (modelId) {
    const model = value(modelId);
    conditions.push(
      `EXISTS (SELECT 1 FROM assignments a WHERE a.worker_id = d.worker_id AND a.valid @> d.date AND CAST(${model} AS uuid) IN (a.inner_model_id, a.outer_model_id))`,
    );
  }
  if (pair)
    conditions.push(
      `EXISTS (SELECT 1 FROM assignments a WHERE a.worker_id = d.worker_id AND a.valid @> d.date
         AND a.inner_model_id = ${value(pair.innerModelId)} AND a.outer_model_id = ${value(pair.outerModelId)})`,
    );
  return conditions.join(" AND ");
}

/**
 * Marks the days whose inputs a change has moved and queues their recomputation, in the change's own transaction.
 * Until they are computed anew they keep their result, marked as out of date.
 */
export async function markDaysStale(organizationId: string, where: Concerned): Promise<number> {
  const bind: unknown[] = [organizationId];
  const conditions = concernedDays(where, (given) => `$${bind.push(given)}`);
  const marked = await execute(
    `UPDATE days d SET is_stale = TRUE WHERE d.organization_id = $1 AND NOT d.is_stale AND ${conditions}`,
    bind,
  );
  if (marked > 0) await queueRecompute(organizationId);
  return marked;
}

/** One job at a time works through an organization's stale days, whoever asked for it. */
export async function queueRecompute(organizationId: string): Promise<void> {
  await addJob(
    "recompute-days",
    { organizationId },
    { key: `recompute:${organizationId}`, queue: `recompute:${organizationId}` },
  );
}
