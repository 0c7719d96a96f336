import type { CombinationView } from "../../shared/schemas/protector";
import { rows } from "../lib/db";
import { combinationInForce } from "./own-attenuation";

export type CombinationRow = Omit<CombinationView, "createdAt"> & { createdAt: Date };

/** Test data of the pairs that a model the actor may see is one of: by pair, and of each pair the latest first. */
export async function listCombinations(modelId: string): Promise<CombinationRow[]> {
  return rows<CombinationRow>(
    `SELECT c.id, c.inner_model_id AS "innerModelId", i.name AS "innerName", c.outer_model_id AS "outerModelId", o.name AS "outerName",
       c.number, c.effective_from::text AS "effectiveFrom", c.bands, c.reason, u.name AS "authorName", c.created_at AS "createdAt",
       c.id IS NOT DISTINCT FROM ${combinationInForce("k.inner_model_id", "k.outer_model_id", "current_date")} AS "isInForce"
     FROM protector_combinations c
     JOIN LATERAL (SELECT c.inner_model_id, c.outer_model_id) k ON TRUE
     JOIN protector_models i ON i.id = c.inner_model_id JOIN protector_models o ON o.id = c.outer_model_id
     LEFT JOIN users u ON u.id = c.author_id
     WHERE :modelId IN (c.inner_model_id, c.outer_model_id)
     ORDER BY i.name, o.name, c.inner_model_id, c.outer_model_id, c.effective_from DESC, c.number DESC`,
    { modelId },
  );
}
