import type { z } from "zod";
import type { ProtectorFacts } from "../../shared/schemas/evaluation";
import type { ProtectorInput } from "../../shared/schemas/protector";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { assignmentPolicy, protectorPolicy } from "../policies";

export type ProtectorRow = z.infer<typeof ProtectorInput> & {
  id: string;
  revision: number;
  wearersToday: number;
};
export interface ProtectorRevisionRow {
  id: string;
  modelId: string;
  number: number;
  effectiveFrom: string;
  data: ProtectorFacts;
  reason: string | null;
  authorName: string | null;
  createdAt: Date;
  isInForce: boolean;
}

/** Whoever this actor may know of, at the sites of theirs, has something of the register assigned today. */
const wornToday = (actor: Actor): string =>
  `a.valid @> current_date AND ${visible(assignmentPolicy, actor, "a")}`;

export async function listProtectors(
  actor: Actor,
  id: string | null = null,
): Promise<ProtectorRow[]> {
  return rows<ProtectorRow>(
    `SELECT m.id, m.name, m.kind, m.is_archived AS "isArchived", m.revision,
       (SELECT count(DISTINCT a.worker_id)::int FROM assignments a
        WHERE m.id IN (a.inner_model_id, a.outer_model_id) AND ${wornToday(actor)}) AS "wearersToday"
     FROM protector_models m WHERE ${visible(protectorPolicy, actor, "m")} AND (CAST(:id AS uuid) IS NULL OR m.id = :id)
     ORDER BY m.is_archived, m.name, m.id`,
    { id },
  );
}

/** People, each once, however many protectors they have for their tasks. */
export async function countWearers(actor: Actor): Promise<number> {
  const [counted] = await rows<{ count: number }>(
    `SELECT count(DISTINCT a.worker_id)::int AS count FROM assignments a WHERE ${wornToday(actor)}`,
    {},
  );
  return counted?.count ?? 0;
}

/**
 * Data of these models, the latest first: all, or only those in force today. A model whose first data hold from a later
 * day on is shown with those.
 */
export async function listProtectorRevisions(
  modelIds: readonly string[],
  which: "all" | "in-force",
): Promise<ProtectorRevisionRow[]> {
  if (modelIds.length === 0) return [];
  return rows<ProtectorRevisionRow>(
    `SELECT * FROM (
       SELECT r.id, r.model_id AS "modelId", r.number, r.effective_from::text AS "effectiveFrom", r.data, r.reason,
         u.name AS "authorName", r.created_at AS "createdAt",
         r.id = (SELECT f.id FROM protector_model_revisions f WHERE f.model_id = r.model_id
                 ORDER BY f.effective_from > current_date,
                   CASE WHEN f.effective_from > current_date THEN f.effective_from END,
                   f.effective_from DESC, f.number DESC LIMIT 1) AS "isInForce"
       FROM protector_model_revisions r LEFT JOIN users u ON u.id = r.author_id WHERE r.model_id IN (:modelIds)) revision
     WHERE :all OR revision."isInForce"
     ORDER BY revision."effectiveFrom" DESC, revision.number DESC`,
    { modelIds, all: which === "all" },
  );
}
