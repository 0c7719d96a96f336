import { rows } from "../lib/db";
import { groupBy } from "../lib/group-by";

/**
 * SQL: what was said last of a model is that this worker cannot wear it, and no fit was tested since. `worker`, `model` and
 * `date` are SQL.
 */
export const cannotWearOn = (worker: string, model: string, date: string): string =>
  `coalesce((SELECT r.kind = 'cannot-wear' AND NOT EXISTS (SELECT 1 FROM fit_tests t
       WHERE t.worker_id = r.worker_id AND t.model_id = r.model_id AND NOT t.is_void AND t.created_at > r.created_at)
     FROM protector_refusals r WHERE r.worker_id = ${worker} AND r.model_id = ${model} AND r.happened_on <= ${date}
     ORDER BY r.happened_on DESC, r.created_at DESC LIMIT 1), FALSE)`;

/** By worker the models that they can't wear. */
export async function cannotWear(
  workerIds: readonly string[],
  date: string,
): Promise<ReadonlyMap<string, ReadonlySet<string>>> {
  const found = await rows<{ workerId: string; modelId: string }>(
    `SELECT x.worker_id AS "workerId", x.model_id AS "modelId" FROM (SELECT DISTINCT worker_id, model_id FROM protector_refusals
       WHERE worker_id = ANY (CAST(:ids AS uuid[])) AND kind = 'cannot-wear' AND model_id IS NOT NULL) x
     WHERE ${cannotWearOn("x.worker_id", "x.model_id", "CAST(:date AS date)")}`,
    { ids: `{${workerIds.join(",")}}`, date },
  );
  return new Map(
    [...groupBy(found, ({ workerId }) => workerId)].map(([id, models]) => [
      id,
      new Set(models.map(({ modelId }) => modelId)),
    ]),
  );
}
