import { randomUUID } from "node:crypto";
import type { HistoryHead } from "../../shared/schemas/history";
import { recordAudit } from "../lib/audit";
import { execute, row } from "../lib/db";
import { AppError } from "../lib/errors";
import type { StagedFile } from "../lib/file-store";
import type { Actor } from "../lib/policy";
import { storeFile } from "./store-file";

export const HISTORY_MEDIA_TYPES = [
  "text/plain",
  "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet",
];

interface Start {
  instrument: { id: string; siteId: string };
  /** The run it belongs to, or the worker whose new run it becomes. */
  runId: string | null;
  workerId: string | null;
  fileName: string;
  head: HistoryHead;
}

/** Where a file of these contents is already, as far as this person may know of it. */
async function refuseSameFile(actor: Actor, sha256: string): Promise<void> {
  const found = await row<{ historyId: string | null; importId: string | null; siteId: string }>(
    `SELECT h.id AS "historyId", NULL::uuid AS "importId", h.site_id AS "siteId" FROM files f JOIN time_histories h ON h.file_id = f.id AND NOT h.is_void
     WHERE f.sha256 = decode(:sha256, 'hex')
     UNION ALL
     SELECT NULL, m.id, m.site_id FROM files f JOIN history_imports m ON m.file_id = f.id AND m.state NOT IN ('stored', 'cancelled', 'failed')
     WHERE f.sha256 = decode(:sha256, 'hex') LIMIT 1`,
    { sha256 },
  );
  if (!found) return;
  const { siteId, historyId, importId } = found;
  const isTheirs = actor.isAt(siteId, "officer", "auditor");
  throw new AppError("same-file", 409, {}, [], isTheirs ? { historyId, importId } : {});
}

/**
 * A file of levels has come in. Its beginning is known, and nothing is stored of it but the file.
 *
 * @throws AppError same-file, with where it is.
 */
export async function startHistoryImport(
  actor: Actor,
  staged: StagedFile,
  { instrument, runId, workerId, fileName, head }: Start,
): Promise<string> {
  await refuseSameFile(actor, staged.sha256);
  const { sha256, sizeBytes } = staged;
  const file = await storeFile(actor, staged, fileName, HISTORY_MEDIA_TYPES);
  const id = randomUUID();
  await execute(
    `INSERT INTO history_imports (id, organization_id, site_id, instrument_id, file_id, file_name, size_bytes, run_id, worker_id, state, head, author_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9, 'uploaded', $10::jsonb, $11)`,
    [
      id,
      actor.organizationId,
      instrument.siteId,
      instrument.id,
      file.id,
      fileName.slice(-255),
      sizeBytes,
      runId,
      runId === null ? workerId : null,
      JSON.stringify(head),
      actor.userId,
    ],
  );
  await recordAudit(actor, {
    action: "start-history-import",
    subjectKind: "history-import",
    subjectId: id,
    values: { fileName, sha256, sizeBytes, instrumentId: instrument.id, runId, workerId },
  });
  return id;
}
