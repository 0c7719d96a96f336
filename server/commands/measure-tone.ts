import { randomUUID } from "node:crypto";
import type { CalibrationTone } from "../../shared/schemas/recording";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { StagedFile } from "../lib/file-store";
import type { Actor } from "../lib/policy";
import { analyseRecording } from "../recordings/analyse-recording";
import { RecordingError } from "../recordings/recording-error";
import type { RecordingTones } from "../recordings/recording-job";

interface Tone {
  siteId: string;
  fileName: string;
  toneDb: number;
  frequencyHz: number;
}

async function readTones(path: string, { toneDb, frequencyHz }: Tone): Promise<RecordingTones> {
  try {
    return await analyseRecording(path, {
      kind: "tone",
      toneLevelDb: toneDb,
      frequencyHz,
      // A tone counts from its steady stretch, however the file ends; overloaded it has no level.
      accept: ["recording-truncated", "recording-length-unstated"],
    });
  } catch (error) {
    if (!(error instanceof RecordingError)) throw error;
    throw unprocessable([issue(["file"], error.code, { ...error.params })]);
  }
}

/**
 * Measures a calibrator's tone and keeps what was measured, not the audio.
 *
 * @throws AppError 422 where there is no steady tone in it.
 */
export async function measureTone(
  actor: Actor,
  staged: StagedFile,
  tone: Tone,
): Promise<CalibrationTone> {
  const { tones } = await readTones(staged.path, tone);
  const { siteId, fileName, toneDb, frequencyHz } = tone;
  const channels = tones.map((reading) =>
    reading.found
      ? {
          pascalPerFullScale: reading.paPerFullScale,
          frequencyHz: reading.frequencyHz,
          spreadDb: reading.spreadDb,
          durationS: reading.durationS,
        }
      : null,
  );
  const id = randomUUID();
  await execute(
    `INSERT INTO calibration_tones (id, organization_id, site_id, file_name, sha256, tone_db, frequency_hz, channels, author_id)
     VALUES ($1, $2, $3, $4, decode($5, 'hex'), $6, $7, $8::jsonb, $9)`,
    [
      id,
      actor.organizationId,
      siteId,
      fileName.slice(-255),
      staged.sha256,
      toneDb,
      frequencyHz,
      JSON.stringify(channels),
      actor.userId,
    ],
  );
  await recordAudit(actor, {
    action: "measure-tone",
    subjectKind: "site",
    subjectId: siteId,
    values: { toneId: id, fileName, sha256: staged.sha256, toneDb, frequencyHz, channels },
  });
  return { id, fileName, toneDb, frequencyHz, channels };
}
