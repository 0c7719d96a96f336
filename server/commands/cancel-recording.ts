import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Recording } from "../models/survey";
import { dropUnusedFile } from "./drop-unused-file";

/** States in which a recording waits for its analysis, or for an answer. */
const OPEN: readonly Recording["state"][] = ["uploaded", "analysing", "asked"];

/**
 * Gives a recording up. Whatever is at work on it finds that out at its next step; its audio goes, and the line stays.
 * The author is the system where nobody answered what was asked.
 *
 * @throws AppError wrong-state once it is analysed, failed or cancelled.
 */
export async function cancelRecording(
  author: Pick<Actor, "organizationId" | "userId"> | { organizationId: string },
  found: Pick<Recording, "id" | "state" | "fileId" | "fileName">,
): Promise<void> {
  if (!OPEN.includes(found.state)) throw new AppError("wrong-state", 409);
  await execute(
    `UPDATE recordings SET state = 'cancelled', file_id = NULL, failure = NULL, progress_pct = 0, updated_at = now(), revision = revision + 1 WHERE id = $1`,
    [found.id],
  );
  if (found.fileId) await dropUnusedFile(author.organizationId, found.fileId);
  await recordAudit(author, {
    action: "cancel-recording",
    subjectKind: "recording",
    subjectId: found.id,
    values: { fileName: found.fileName, state: found.state },
  });
}
