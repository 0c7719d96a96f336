import type { RefusalView } from "../../shared/schemas/fit";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { refusalPolicy } from "../policies";

/** A worker's refusals and non-wear with their reasons, the latest first, for whoever may read them. */
export function listRefusals(actor: Actor, workerId: string): Promise<RefusalView[]> {
  return rows<RefusalView>(
    `SELECT r.id, r.worker_id AS "workerId", r.model_id AS "modelId", m.name AS "modelName", r.kind, r.happened_on::text AS "happenedOn",
       r.reason, u.name AS "authorName"
     FROM protector_refusals r LEFT JOIN protector_models m ON m.id = r.model_id LEFT JOIN users u ON u.id = r.author_id
     WHERE r.worker_id = :workerId AND ${visible(refusalPolicy, actor, "r")} ORDER BY r.happened_on DESC, r.created_at DESC`,
    { workerId },
  );
}
