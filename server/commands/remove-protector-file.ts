import { recordAudit } from "../lib/audit";
import { rows } from "../lib/db";
import { notFound } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { ProtectorModel } from "../models/protector";

/**
 * A data sheet no longer stands with its model; the trail keeps that it did, and why it went.
 *
 * @throws AppError not-found where no such sheet stands with the model.
 */
export async function removeProtectorFile(
  actor: Actor,
  model: ProtectorModel,
  attachmentId: string,
  reason: string,
): Promise<void> {
  const [removed] = await rows<{ title: string; fileId: string }>(
    `UPDATE protector_files SET is_removed = TRUE WHERE id = :attachmentId AND model_id = :modelId AND NOT is_removed
     RETURNING title, file_id AS "fileId"`,
    { attachmentId, modelId: model.id },
  );
  if (!removed) throw notFound();
  await recordAudit(actor, {
    action: "remove-protector-file",
    subjectKind: "protector",
    subjectId: model.id,
    values: { ...removed, reason },
  });
}
