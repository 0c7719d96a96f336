import { recordAudit } from "../lib/audit";
import { rows } from "../lib/db";
import { notFound } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Finding } from "../models/finding";

/**
 * A paper no longer stands with its finding; the trail keeps that it did, and why it went.
 *
 * @throws AppError not-found where no such paper stands with the finding.
 */
export async function removeFindingFile(
  actor: Actor,
  finding: Finding,
  attachmentId: string,
  reason: string,
): Promise<void> {
  const [removed] = await rows<{ title: string; fileId: string }>(
    `UPDATE finding_files SET is_removed = TRUE WHERE id = :attachmentId AND finding_id = :findingId AND NOT is_removed
     RETURNING title, file_id AS "fileId"`,
    { attachmentId, findingId: finding.id },
  );
  if (!removed) throw notFound();
  await recordAudit(actor, {
    action: "remove-finding-file",
    subjectKind: "finding",
    subjectId: finding.id,
    values: { ...removed, reason },
  });
}
