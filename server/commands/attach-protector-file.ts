import { recordAudit } from "../lib/audit";
import { execute, row } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { ProtectorModel } from "../models/protector";

/** A file that was sent becomes a data sheet of the model. The model's row is locked. */
export async function attachProtectorFile(
  actor: Actor,
  model: ProtectorModel,
  file: { id: string; name: string; sha256: string },
  title: string,
): Promise<void> {
  const isThere = await row(
    "SELECT 1 AS one FROM protector_files WHERE model_id = :modelId AND file_id = :fileId AND NOT is_removed",
    { modelId: model.id, fileId: file.id },
  );
  if (isThere) throw unprocessable([issue(["fileId"], "file-attached-already")]);
  await execute(
    `INSERT INTO protector_files (organization_id, model_id, file_id, title, author_id) VALUES ($1, $2, $3, $4, $5)`,
    [actor.organizationId, model.id, file.id, title, actor.userId],
  );
  await recordAudit(actor, {
    action: "attach-protector-file",
    subjectKind: "protector",
    subjectId: model.id,
    values: { title, fileId: file.id, fileName: file.name, sha256: file.sha256 },
  });
}
