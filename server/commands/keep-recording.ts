import type { RecordingKeep } from "../../shared/schemas/recording";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Recording } from "../models/survey";
import { dropUnusedFile } from "./drop-unused-file";
import { requireDayAhead } from "./start-recording";

/**
 * Audio that is here is kept for a reason and until a day; said again, another reason or another day.
 *
 * @throws AppError wrong-state where the audio has gone; 422 where the day does not lie ahead.
 */
export async function keepRecording(
  actor: Actor,
  found: Recording,
  timeZone: string,
  { keepReason, deleteOn }: RecordingKeep,
): Promise<void> {
  if (found.fileId === null) throw new AppError("wrong-state", 409);
  requireDayAhead(deleteOn, timeZone);
  // An analysis that is under way goes on: its order is the same.
  await execute(
    `UPDATE recordings SET keep_reason = $2, delete_on = $3, revision = revision + CASE WHEN state IN ('uploaded', 'analysing') THEN 0 ELSE 1 END WHERE id = $1`,
    [found.id, keepReason, deleteOn],
  );
  await recordAudit(actor, {
    action: "keep-recording",
    subjectKind: "recording",
    subjectId: found.id,
    values: { keepReason, deleteOn },
  });
}

/**
 * The audio goes; levels and spectra stay. The author is the system on the day that was set.
 *
 * @throws AppError wrong-state where it has gone already, or is still needed for the analysis.
 */
export async function deleteAudio(
  author: Pick<Actor, "organizationId" | "userId"> | { organizationId: string },
  found: Pick<Recording, "id" | "state" | "fileId">,
): Promise<void> {
  if (found.state !== "analysed" || found.fileId === null) throw new AppError("wrong-state", 409);
  await execute(
    "UPDATE recordings SET file_id = NULL, updated_at = now(), revision = revision + 1 WHERE id = $1",
    [found.id],
  );
  await dropUnusedFile(author.organizationId, found.fileId);
  await recordAudit(author, {
    action: "delete-audio",
    subjectKind: "recording",
    subjectId: found.id,
    values: {},
  });
}
