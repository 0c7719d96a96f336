import type { OnWorker } from "../../shared/findings/remedy";
import { rows } from "../lib/db";
import { groupBy } from "../lib/group-by";
import { cannotWearOn } from "./cannot-wear";
import { activeCheckInForce, fitInForce } from "./own-attenuation";

interface OnDate {
  readonly workerId: string;
  /** ISO date. */
  readonly date: string;
}

type ValuesRow = OnDate & {
  modelId: string;
  ownFitDb: number | null;
  activeCheckPassed: boolean;
  cannotWear: boolean;
};

export const onWorkerKey = ({ workerId, date }: OnDate): string => `${workerId} ${date}`;

/** What single models do on these workers on these dates, as a day's verdict would take it: of the size assigned, where one is. */
export async function knownOnWorkers(days: readonly OnDate[]): Promise<Map<string, OnWorker>> {
  if (days.length === 0) return new Map();
  const found = await rows<ValuesRow>(
    `SELECT x.worker_id AS "workerId", x.date::text AS date, x.model_id AS "modelId", fit.par_db AS "ownFitDb",
       coalesce(active.active_passed, FALSE) AS "activeCheckPassed", ${cannotWearOn("x.worker_id", "x.model_id", "x.date")} AS "cannotWear"
     FROM (SELECT f.worker_id, d.date, f.model_id FROM jsonb_to_recordset($1::jsonb) AS d("workerId" uuid, date date)
       JOIN fit_tests f ON f.worker_id = d."workerId" AND f.tested_on <= d.date AND NOT f.is_void
       UNION SELECT r.worker_id, d.date, r.model_id FROM jsonb_to_recordset($1::jsonb) AS d("workerId" uuid, date date)
       JOIN protector_refusals r ON r.worker_id = d."workerId" AND r.happened_on <= d.date AND r.kind = 'cannot-wear' AND r.model_id IS NOT NULL) x
     LEFT JOIN LATERAL (SELECT s.size FROM assignments s
       WHERE s.worker_id = x.worker_id AND s.inner_model_id = x.model_id AND s.outer_model_id IS NULL AND s.valid @> x.date
       ORDER BY (s.task_id IS NULL AND s.area_id IS NULL) DESC, s.id LIMIT 1) a ON TRUE
     LEFT JOIN fit_test_revisions fit ON fit.id = ${fitInForce("x.worker_id", "x.model_id", "a.size", "x.date")}
     LEFT JOIN fit_test_revisions active ON active.id = ${activeCheckInForce("x.worker_id", "x.model_id", "a.size", "x.date")}`,
    [JSON.stringify(days.map(({ workerId, date }) => ({ workerId, date })))],
  );
  return new Map(
    [...groupBy(found, onWorkerKey)].map(([key, models]) => [
      key,
      new Map(
        models.map(({ modelId, ownFitDb, activeCheckPassed, cannotWear }) => [
          modelId,
          { ownFitDb, activeCheckPassed, cannotWear },
        ]),
      ),
    ]),
  );
}
