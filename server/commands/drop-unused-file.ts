import { currentTransaction, rows } from "../lib/db";
import { fileStore } from "../lib/file-store";

/** Takes a file away unless it serves something: the same content is kept once, whoever it belongs to. */
export async function dropUnusedFile(organizationId: string, fileId: string): Promise<void> {
  const [gone] = await rows<{ sha256: string }>(
    `DELETE FROM files f WHERE f.id = :fileId
       AND NOT EXISTS (SELECT 1 FROM history_imports m WHERE m.file_id = f.id)
       AND NOT EXISTS (SELECT 1 FROM time_histories h WHERE h.file_id = f.id)
       AND NOT EXISTS (SELECT 1 FROM run_files r WHERE r.file_id = f.id)
       AND NOT EXISTS (SELECT 1 FROM instrument_calibrations c WHERE c.certificate_file_id = f.id)
       AND NOT EXISTS (SELECT 1 FROM protector_files p WHERE p.file_id = f.id)
       AND NOT EXISTS (SELECT 1 FROM finding_files d WHERE d.file_id = f.id)
       AND NOT EXISTS (SELECT 1 FROM training_sessions t WHERE t.file_id = f.id)
       AND NOT EXISTS (SELECT 1 FROM recordings a WHERE a.file_id = f.id)
       AND NOT EXISTS (SELECT 1 FROM microphone_check_files k WHERE k.file_id = f.id)
     RETURNING encode(f.sha256, 'hex') AS sha256`,
    { fileId },
  );
  // Only once the row is gone for good: a row never names a file that is not there.
  if (gone) currentTransaction().afterCommit(() => fileStore().remove(organizationId, gone.sha256));
}
