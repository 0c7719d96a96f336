import type { z } from "zod";
import type { ActivePart } from "../../shared/acoustics/types";
import type { PageQuery } from "../../shared/schemas/common";
import type {
  MicrophoneCheckPage,
  MicrophoneCheckView,
} from "../../shared/schemas/microphone-check";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { row, rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import { isoInstant } from "../lib/sql-instant";
import { fitPolicy } from "../policies";

type Found = Omit<MicrophoneCheckView, "can">;

const SELECT_CHECKS = `SELECT c.id, c.revision, c.site_id AS "siteId", c.worker_id AS "workerId", w.name AS "workerName", c.model_id AS "modelId",
    m.name AS "modelName", c.ear, c.state, c.progress_pct AS "progressPct", c.parts, c.calibration, c.correction, c.spectrum, c.analysis, c.failure,
    c.fit_test_id AS "fitTestId", u.name AS "authorName", ${isoInstant("c.created_at")} AS "createdAt",
    ARRAY(SELECT f.file_name FROM microphone_check_files f WHERE f.check_id = c.id ORDER BY f.position) AS files
  FROM microphone_checks c JOIN workers w ON w.id = c.worker_id JOIN protector_models m ON m.id = c.model_id LEFT JOIN users u ON u.id = c.author_id`;

const present = (actor: Actor, check: Found): MicrophoneCheckView => ({
  ...check,
  can: { change: abilities(fitPolicy, actor, check).change },
});

export async function microphoneCheckView(actor: Actor, id: string): Promise<MicrophoneCheckView> {
  const condition = visible(fitPolicy, actor, "c");
  return present(
    actor,
    only(await rows<Found>(`${SELECT_CHECKS} WHERE c.id = :id AND ${condition}`, { id })),
  );
}

/** A worker's checks, the latest first. */
export async function listMicrophoneChecks(
  actor: Actor,
  workerId: string,
  { cursor, limit }: z.output<typeof PageQuery>,
): Promise<z.input<typeof MicrophoneCheckPage>> {
  const before = decodeCursor(cursor, 2);
  const found = await rows<Found & { at: string }>(
    `SELECT x.*, c.created_at::text AS at FROM (${SELECT_CHECKS} WHERE c.worker_id = :workerId AND ${visible(fitPolicy, actor, "c")}) x
     JOIN microphone_checks c ON c.id = x.id
     WHERE ${before ? "(c.created_at, c.id) < (CAST(:before AS timestamptz), CAST(:beforeId AS uuid))" : "TRUE"}
     ORDER BY c.created_at DESC, c.id DESC LIMIT :limit`,
    { workerId, before: before?.[0] ?? null, beforeId: before?.[1] ?? null, limit: limit + 1 },
  );
  const page = pageFrom(found, limit, ({ at, id }) => [at, id]);
  return { ...page, rows: page.rows.map(({ at: _, ...check }) => present(actor, check)) };
}

/** The active part that a model states today; null: it has none, or nothing is on record of it yet. */
export async function statedActivePart(modelId: string): Promise<ActivePart | null> {
  const found = await row<{ active: ActivePart | null }>(
    `SELECT r.data->'active' AS active FROM protector_model_revisions r WHERE r.model_id = :modelId AND r.effective_from <= current_date
     ORDER BY r.effective_from DESC, r.number DESC LIMIT 1`,
    { modelId },
  );
  return found?.active ?? null;
}

/** A task's octave bands today; null: its level states none. */
export async function taskBands(taskId: string): Promise<MicrophoneCheckView["spectrum"]> {
  return row<NonNullable<MicrophoneCheckView["spectrum"]>>(
    `SELECT t.id AS "taskId", t.name AS "taskName", to_json(l.octave_bands_db) AS "bandsDb"
     FROM tasks t JOIN LATERAL (SELECT x.octave_bands_db FROM task_levels x WHERE x.task_id = t.id AND x.effective_from <= current_date
       ORDER BY x.effective_from DESC, x.number DESC LIMIT 1) l ON l.octave_bands_db IS NOT NULL WHERE t.id = :taskId`,
    { taskId },
  );
}
