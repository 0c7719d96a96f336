import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import {
  audioPolicy,
  findingFilePolicy,
  historyPolicy,
  programmePolicy,
  protectorPolicy,
  runPolicy,
  trainingPolicy,
} from "../policies";

export interface FileRow {
  id: string;
  name: string;
  mediaType: string;
  sizeBytes: number;
  sha256: string;
  uploadedAt: Date;
}

/**
 * Those of the files that this person may have: who may see the run, the instrument, the protector, the finding or the time history
 * that a file belongs to, who may hear a recording, and whoever sent it. The same content is kept once, so that the trail says who sent it, not the row.
 */
export async function visibleFiles(actor: Actor, ids: readonly string[]): Promise<FileRow[]> {
  if (ids.length === 0) return [];
  return rows<FileRow>(
    `SELECT f.id, f.name, f.media_type AS "mediaType", f.size_bytes::float8 AS "sizeBytes", encode(f.sha256, 'hex') AS sha256, f.uploaded_at AS "uploadedAt"
     FROM files f WHERE f.id = ANY (CAST(:ids AS uuid[])) AND f.erased_at IS NULL AND (
       EXISTS (SELECT 1 FROM audit_events e WHERE e.subject_kind = 'file' AND e.subject_id = f.id AND e.actor_id = :userId)
       OR EXISTS (SELECT 1 FROM run_files x JOIN runs r ON r.id = x.run_id WHERE x.file_id = f.id AND ${visible(runPolicy, actor, "r")})
       OR EXISTS (SELECT 1 FROM instrument_calibrations c JOIN instruments i ON i.id = c.instrument_id
         WHERE c.certificate_file_id = f.id AND ${visible(programmePolicy, actor, "i")})
       OR EXISTS (SELECT 1 FROM protector_files p JOIN protector_models m ON m.id = p.model_id
         WHERE p.file_id = f.id AND NOT p.is_removed AND ${visible(protectorPolicy, actor, "m")})
       OR EXISTS (SELECT 1 FROM finding_files p JOIN findings n ON n.id = p.finding_id
         WHERE p.file_id = f.id AND NOT p.is_removed AND ${visible(findingFilePolicy, actor, "n")})
       OR EXISTS (SELECT 1 FROM training_sessions t WHERE t.file_id = f.id AND (${visible(trainingPolicy, actor, "t")}
         OR EXISTS (SELECT 1 FROM training_attendances a WHERE a.session_id = t.id AND a.worker_id = :workerId)))
       OR EXISTS (SELECT 1 FROM time_histories h WHERE h.file_id = f.id AND ${visible(historyPolicy, actor, "h")})
       OR EXISTS (SELECT 1 FROM recordings a WHERE a.file_id = f.id AND ${visible(audioPolicy, actor, "a")}))`,
    { ids: `{${ids.join(",")}}`, userId: actor.userId, workerId: actor.workerId },
  );
}
