import type { z } from "zod";
import type {
  CalibrationTone,
  RecordingFilter,
  RecordingPage,
  RecordingView,
} from "../../shared/schemas/recording";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { row, rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import { isoInstant } from "../lib/sql-instant";
import { historyPolicy } from "../policies";

type Found = Omit<RecordingView, "can">;

const FACTS = `r.id, r.site_id AS "siteId", s.time_zone AS "timeZone", r.task_id AS "taskId", t.name AS "taskName", r.file_name AS "fileName",
    r.size_bytes::float8 AS "sizeBytes", r.state, r.progress_pct AS "progressPct", r.calibration, r.analysis, r.failure, r.accepted,
    r.file_id AS "fileId", r.keep_reason AS "keepReason", r.delete_on::text AS "deleteOn", u.name AS "authorName",
    ${isoInstant("r.created_at")} AS "createdAt", r.revision,
    ARRAY(SELECT DISTINCT l.effective_from::text FROM task_levels l WHERE l.recording_id = r.id ORDER BY 1) AS "usedFrom"`;
const TABLES = `recordings r JOIN sites s ON s.id = r.site_id JOIN tasks t ON t.id = r.task_id LEFT JOIN users u ON u.id = r.author_id`;

export async function recordingView(actor: Actor, id: string): Promise<RecordingView> {
  const found = only(await rows<Found>(`SELECT ${FACTS} FROM ${TABLES} WHERE r.id = :id`, { id }));
  return { ...found, can: abilities(historyPolicy, actor, found) };
}

export async function listRecordings(
  actor: Actor,
  filter: z.output<typeof RecordingFilter>,
): Promise<z.input<typeof RecordingPage>> {
  const cursor = decodeCursor(filter.cursor, 2);
  const conditions = [visible(historyPolicy, actor, "r")];
  if (filter.taskId) conditions.push("r.task_id = :taskId");
  if (filter.siteId) conditions.push("r.site_id = :siteId");
  if (filter.isKept) conditions.push("r.file_id IS NOT NULL AND r.state = 'analysed'");
  if (cursor)
    conditions.push(
      "(r.created_at, r.id) < (CAST(:before AS timestamptz), CAST(:beforeId AS uuid))",
    );
  const found = await rows<Found & { at: string }>(
    `SELECT ${FACTS}, r.created_at::text AS at FROM ${TABLES} WHERE ${conditions.join(" AND ")} ORDER BY r.created_at DESC, r.id DESC LIMIT :limit`,
    {
      taskId: filter.taskId,
      siteId: filter.siteId,
      before: cursor?.[0] ?? null,
      beforeId: cursor?.[1] ?? null,
      limit: filter.limit + 1,
    },
  );
  const page = pageFrom(found, filter.limit, ({ at, id }) => [at, id]);
  return {
    ...page,
    rows: page.rows.map(({ at: _, ...one }) => ({
      ...one,
      can: abilities(historyPolicy, actor, one),
    })),
  };
}

/** A tone measured at this site; null: there is none of that id. */
export function findTone(id: string, siteId: string): Promise<CalibrationTone | null> {
  return row<CalibrationTone>(
    `SELECT id, file_name AS "fileName", tone_db AS "toneDb", frequency_hz AS "frequencyHz", channels
     FROM calibration_tones WHERE id = :id AND site_id = :siteId`,
    { id, siteId },
  );
}
