import { randomUUID } from "node:crypto";
import type { RecordingCalibration } from "../../shared/schemas/recording";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { execute } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import { type StagedFile, sniffMediaType } from "../lib/file-store";
import { addJob } from "../lib/jobs";
import type { Actor } from "../lib/policy";
import type { Task } from "../models/task";
import { storeFile } from "./store-file";

const MEDIA_TYPE = "audio/wav";

interface Start {
  task: Task;
  timeZone: string;
  fileName: string;
  calibration: RecordingCalibration;
  keepReason: string | null;
  deleteOn: string | null;
}

/** One recording at a time, so that a long one leaves room for everything else. */
export function queueAnalysis(organizationId: string, recordingId: string): Promise<void> {
  return addJob(
    "analyse-recording",
    { organizationId, recordingId },
    { key: `analyse-recording:${recordingId}`, queue: "recordings" },
  );
}

/** A day on which kept audio is to go: it lies ahead, within a year. */
export function requireDayAhead(deleteOn: string, timeZone: string): void {
  const issues =
    deleteOn <= todayAt(timeZone)
      ? [issue(["deleteOn"], "date-not-ahead")]
      : dateIssues(["deleteOn"], deleteOn);
  if (issues.length > 0) throw unprocessable(issues);
}

/**
 * A recording has come in and waits for its analysis.
 *
 * @throws AppError 422 where it is no WAV file, or the day of its deletion does not lie ahead.
 */
export async function startRecording(
  actor: Actor,
  staged: StagedFile,
  { task, timeZone, fileName, calibration, keepReason, deleteOn }: Start,
): Promise<string> {
  if ((await sniffMediaType(staged.path)) !== MEDIA_TYPE)
    throw unprocessable([issue(["file"], "recording-not-wav")]);
  if (deleteOn !== null) requireDayAhead(deleteOn, timeZone);
  const { sha256, sizeBytes } = staged;
  const file = await storeFile(actor, staged, fileName, [MEDIA_TYPE]);
  const id = randomUUID();
  await execute(
    `INSERT INTO recordings (id, organization_id, site_id, task_id, file_name, sha256, size_bytes, state, calibration, file_id, keep_reason, delete_on, author_id)
     VALUES ($1, $2, $3, $4, $5, decode($6, 'hex'), $7, 'uploaded', $8::jsonb, $9, $10, $11, $12)`,
    [
      id,
      actor.organizationId,
      task.siteId,
      task.id,
      fileName.slice(-255),
      sha256,
      sizeBytes,
      JSON.stringify(calibration),
      file.id,
      keepReason,
      deleteOn,
      actor.userId,
    ],
  );
  await queueAnalysis(actor.organizationId, id);
  await recordAudit(actor, {
    action: "start-recording",
    subjectKind: "recording",
    subjectId: id,
    values: { taskId: task.id, fileName, sha256, sizeBytes, calibration, keepReason, deleteOn },
  });
  return id;
}
