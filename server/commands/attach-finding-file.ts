import { recordAudit } from "../lib/audit";
import { execute, row } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Finding } from "../models/finding";

/** A file that was sent becomes a paper of the finding. The finding's row is locked. */
export async function attachFindingFile(
  actor: Actor,
  finding: Finding,
  file: { id: string; name: string; sha256: string },
  title: string,
): Promise<void> {
  const isThere = await row(
    "SELECT 1 AS one FROM finding_files WHERE finding_id = :findingId AND file_id = :fileId AND NOT is_removed",
    { findingId: finding.id, fileId: file.id },
  );
  if (isThere) throw unprocessable([issue(["fileId"], "file-attached-already")]);
  await execute(
    "INSERT INTO finding_files (organization_id, finding_id, file_id, title, author_id) VALUES ($1, $2, $3, $4, $5)",
    [actor.organizationId, finding.id, file.id, title, actor.userId],
  );
  await recordAudit(actor, {
    action: "attach-finding-file",
    subjectKind: "finding",
    subjectId: finding.id,
    values: { title, fileId: file.id, fileName: file.name, sha256: file.sha256 },
  });
}
