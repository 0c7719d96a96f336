import type { CheckAnalysis } from "../../shared/schemas/microphone-check";
import { execute, rows } from "../lib/db";
import { dropUnusedFile } from "./drop-unused-file";

/** What was found goes into the row, which is then open to be kept. */
export async function storeAnalysis(checkId: string, analysis: CheckAnalysis): Promise<void> {
  await execute(
    `UPDATE microphone_checks SET state = 'analysed', analysis = $2::jsonb, failure = NULL, progress_pct = 100, updated_at = now(),
       revision = revision + 1 WHERE id = $1`,
    [checkId, JSON.stringify(analysis)],
  );
}

/** The recordings of a check go; their names stay. */
export async function dropCheckAudio(organizationId: string, checkId: string): Promise<void> {
  const files = await rows<{ fileId: string }>(
    `SELECT DISTINCT file_id AS "fileId" FROM microphone_check_files WHERE check_id = :checkId AND file_id IS NOT NULL`,
    { checkId },
  );
  await execute("UPDATE microphone_check_files SET file_id = NULL WHERE check_id = $1", [checkId]);
  for (const { fileId } of files) await dropUnusedFile(organizationId, fileId);
}
