import type { ProtectorFileView } from "../../shared/schemas/protector";
import { rows } from "../lib/db";

export type ProtectorFileRow = Omit<ProtectorFileView, "createdAt"> & { createdAt: Date };

/** Data sheets that stand with a model the actor may see, the latest first. */
export async function listProtectorFiles(modelId: string): Promise<ProtectorFileRow[]> {
  return rows<ProtectorFileRow>(
    `SELECT p.id, p.file_id AS "fileId", p.title, f.name AS "fileName", f.size_bytes::float8 AS "sizeBytes", u.name AS "authorName",
       p.created_at AS "createdAt"
     FROM protector_files p JOIN files f ON f.id = p.file_id LEFT JOIN users u ON u.id = p.author_id
     WHERE p.model_id = :modelId AND NOT p.is_removed ORDER BY p.created_at DESC, p.id`,
    { modelId },
  );
}
