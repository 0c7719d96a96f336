import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { HistoryImport } from "../models/survey";
import { dropUnusedFile } from "./drop-unused-file";

/**
 * Gives an import up. Whatever is at work on it finds that out at its next step; its file goes unless it serves
 * something else as well. The line stays, with what was given up.
 *
 * @throws AppError wrong-state once it is stored or cancelled.
 */
export async function cancelHistoryImport(actor: Actor, found: HistoryImport): Promise<void> {
  if (found.state === "stored" || found.state === "cancelled")
    throw new AppError("wrong-state", 409);
  await execute(
    `UPDATE history_imports SET state = 'cancelled', file_id = NULL, head = NULL, report = NULL, store_order = NULL, progress_pct = 0,
       updated_at = now(), revision = revision + 1 WHERE id = $1`,
    [found.id],
  );
  if (found.fileId) await dropUnusedFile(actor.organizationId, found.fileId);
  await recordAudit(actor, {
    action: "cancel-history-import",
    subjectKind: "history-import",
    subjectId: found.id,
    values: { fileName: found.fileName, state: found.state },
  });
}
