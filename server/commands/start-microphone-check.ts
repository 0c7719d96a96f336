import { randomUUID } from "node:crypto";
import { NO_CORRECTION_DB, OPEN_EAR_DB } from "../../shared/acoustics/signal/two-microphones-check";
import type {
  CheckCalibration,
  CheckInput,
  CheckPart,
  CheckSpectrum,
  Correction,
  MicrophoneCheckForm,
} from "../../shared/schemas/microphone-check";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import { type StagedFile, sniffMediaType } from "../lib/file-store";
import { addJob } from "../lib/jobs";
import type { Actor } from "../lib/policy";
import type { Worker } from "../models/worker";
import { taskBands } from "../queries/microphone-checks";
import { findTone } from "../queries/recordings";
import { storeFile } from "./store-file";

const MEDIA_TYPE = "audio/wav";

/** Recordings of all kinds take their turns, so that a long one leaves room for everything else. */
export function queueCheck(organizationId: string, checkId: string): Promise<void> {
  return addJob(
    "check-microphones",
    { organizationId, checkId },
    { key: `check-microphones:${checkId}`, queue: "recordings" },
  );
}

/**
 * Recordings from outside and inside a cup have come in and wait for their analysis.
 *
 * @throws AppError 422 where one is no WAV file, or something that the check rests on is not there.
 */
export async function startMicrophoneCheck(
  actor: Actor,
  worker: Worker,
  { check, files }: MicrophoneCheckForm,
  staged: readonly StagedFile[],
): Promise<string> {
  for (const [index, one] of staged.entries())
    if ((await sniffMediaType(one.path)) !== MEDIA_TYPE)
      throw unprocessable([issue(["files", index], "recording-not-wav")]);
  const calibration = await keptCalibration(check.calibration, worker.siteId);
  const basis = await checkBasis(check);
  const { modelId, ear, parts } = check;
  const id = await insertCheck(actor, worker, { modelId, ear, parts, calibration, ...basis });
  for (const [position, one] of staged.entries()) {
    const name = files[position]!.name.slice(-255);
    const stored = await storeFile(actor, one, name, [MEDIA_TYPE]);
    await execute(
      "INSERT INTO microphone_check_files (organization_id, check_id, position, file_id, file_name) VALUES ($1, $2, $3, $4, $5)",
      [actor.organizationId, id, position, stored.id, name],
    );
  }
  await queueCheck(actor.organizationId, id);
  await recordAudit(actor, {
    action: "start-microphone-check",
    subjectKind: "microphone-check",
    subjectId: id,
    values: { workerId: worker.id, modelId, ear, parts, calibration, ...basis, files },
  });
  return id;
}

export interface NewCheck {
  modelId: string;
  ear: CheckInput["ear"];
  parts: readonly CheckPart[];
  calibration: CheckCalibration;
  correction: Correction;
  spectrum: CheckSpectrum | null;
}

/** The row alone, waiting for its analysis. */
export async function insertCheck(
  actor: Actor,
  worker: Worker,
  { modelId, ear, parts, calibration, correction, spectrum }: NewCheck,
): Promise<string> {
  const id = randomUUID();
  await execute(
    `INSERT INTO microphone_checks (id, organization_id, site_id, worker_id, model_id, ear, parts, calibration, correction, spectrum, state, author_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7::jsonb, $8::jsonb, $9::jsonb, $10::jsonb, 'analysing', $11)`,
    [
      id,
      actor.organizationId,
      worker.siteId,
      worker.id,
      modelId,
      ear,
      JSON.stringify(parts),
      JSON.stringify(calibration),
      JSON.stringify(correction),
      spectrum && JSON.stringify(spectrum),
      actor.userId,
    ],
  );
  return id;
}

/**
 * The correction and the noise that a check is judged with, as they stand today.
 *
 * @throws AppError invalid: a correction of one's own without its source, a task without a spectrum.
 */
export async function checkBasis({
  correction,
  taskId,
}: Pick<CheckInput, "correction" | "taskId">): Promise<{
  correction: Correction;
  spectrum: CheckSpectrum | null;
}> {
  if (correction.kind === "own" && correction.source === "")
    throw unprocessable([issue(["correction", "source"], "required")]);
  const spectrum = taskId === null ? null : await taskBands(taskId);
  if (taskId !== null && !spectrum)
    throw unprocessable([issue(["taskId"], "task-has-no-spectrum")]);
  return { correction: stated(correction), spectrum };
}

/** Only a correction of one's own brings its own values. */
function stated(correction: Correction): Correction {
  switch (correction.kind) {
    case "own":
      return correction;
    case "open-ear":
      return { kind: "open-ear", bandsDb: OPEN_EAR_DB.map((db) => db ?? 0), source: "iso-11904-1" };
    case "none":
      return { kind: "none", bandsDb: NO_CORRECTION_DB.map((db) => db ?? 0), source: "" };
  }
}

async function keptCalibration(
  given: CheckInput["calibration"],
  siteId: string,
): Promise<CheckCalibration> {
  if (given.kind !== "tone") return given;
  const pascalsOf = async (side: "outside" | "inside") => {
    const { toneId, channel } = given[side];
    const found = (await findTone(toneId, siteId))?.channels[channel - 1];
    if (!found) throw unprocessable([issue(["calibration", side], "tone-unknown")]);
    return found.pascalPerFullScale;
  };
  return {
    kind: "tone",
    outsidePa: await pascalsOf("outside"),
    insidePa: await pascalsOf("inside"),
    outsideToneId: given.outside.toneId,
    insideToneId: given.inside.toneId,
  };
}
