import type { TrainingInput } from "../../shared/schemas/training";
import { recordAudit } from "../lib/audit";
import { execute, rows } from "../lib/db";
import type { Actor } from "../lib/policy";
import { checkTraining } from "./check-training";

/** Puts down who was at a training, in place of who stood there before. */
export async function writeAttendance(
  organizationId: string,
  sessionId: string,
  workerIds: readonly string[],
): Promise<void> {
  await execute(
    "DELETE FROM training_attendances WHERE session_id = $1 AND worker_id <> ALL ($2::uuid[])",
    [sessionId, workerIds],
  );
  await execute(
    `INSERT INTO training_attendances (organization_id, session_id, worker_id)
     SELECT $1, $2, x FROM unnest($3::uuid[]) x ON CONFLICT DO NOTHING`,
    [organizationId, sessionId, workerIds],
  );
}

/** A training that was held, with who was there; gives its id. */
export async function recordTraining(
  actor: Actor,
  site: { id: string; timeZone: string },
  input: TrainingInput,
): Promise<string> {
  const workerIds = await checkTraining(site, input);
  const { employeeNumbers: _, ...facts } = input;
  const [created] = await rows<{ id: string }>(
    `INSERT INTO training_sessions (organization_id, site_id, held_on, title, duration_min, file_id, author_id)
     VALUES (:organizationId, :siteId, :heldOn, :title, :durationMin, :fileId, :authorId) RETURNING id`,
    { organizationId: actor.organizationId, ...facts, authorId: actor.userId },
  );
  if (!created) throw new Error("a training just stored has an id");
  await writeAttendance(actor.organizationId, created.id, workerIds);
  await recordAudit(actor, {
    action: "record-training",
    subjectKind: "training",
    subjectId: created.id,
    values: { ...facts, workerIds },
  });
  return created.id;
}
