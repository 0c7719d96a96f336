import type { SoundLevels } from "../../shared/acoustics/signal";
import {
  isAcceptable,
  type RecordingAnalysis,
  type RecordingCalibration,
  type RecordingLevels as RecordingChannel,
  type RecordingView,
} from "../../shared/schemas/recording";
import { dropUnusedFile } from "../commands/drop-unused-file";
import { recordAudit } from "../lib/audit";
import { execute, inTransaction, row } from "../lib/db";
import { fileStore } from "../lib/file-store";
import type { JobPayloads } from "../lib/jobs";
import { analyseRecording } from "../recordings/analyse-recording";
import { RecordingError } from "../recordings/recording-error";
import type { RecordingLevels } from "../recordings/recording-job";
import { type Watch, whileBeating } from "./job-beat";

interface Ordered {
  recordingId: string;
  revision: number;
  fileId: string;
  sha256: string;
  calibration: RecordingCalibration;
  accepted: RecordingView["accepted"];
}
type Failure = NonNullable<RecordingView["failure"]>;

/** A recording that ended a process so often is given up. */
const MOST_TRIES = 3;

/** Takes the recording up, or says that there is nothing to do any more. */
async function claim(organizationId: string, recordingId: string): Promise<Ordered | null> {
  const found = await row<Ordered & { tries: number }>(
    `SELECT r.id AS "recordingId", r.revision, r.tries, r.file_id AS "fileId", encode(f.sha256, 'hex') AS sha256, r.calibration, r.accepted
     FROM recordings r JOIN files f ON f.id = r.file_id WHERE r.id = :recordingId AND r.state IN ('uploaded', 'analysing') FOR UPDATE OF r`,
    { recordingId },
  );
  if (!found) return null;
  if (found.tries >= MOST_TRIES) {
    await refuse(organizationId, found, { code: "recording-given-up", params: {} });
    return null;
  }
  await execute(
    "UPDATE recordings SET state = 'analysing', tries = tries + 1, updated_at = now() WHERE id = $1",
    [recordingId],
  );
  return found;
}

/**
 * Analyses a recording that came in. What comes of it is kept, the audio goes, unless it is kept for a reason; so it does
 * where it can't be used. A fault that an officer may accept is asked about, and the audio waits for the answer. A retry
 * begins anew and ends as the first would have; what was cancelled meanwhile ends without a trace.
 */
export async function analyseStoredRecording({
  organizationId,
  recordingId,
}: JobPayloads["analyse-recording"]): Promise<void> {
  const ordered = await inTransaction({ organizationId }, () => claim(organizationId, recordingId));
  if (!ordered) return;
  await whileBeating(
    async (progressPct) => {
      const count = await inTransaction({ organizationId }, () =>
        execute(
          `UPDATE recordings SET progress_pct = greatest(progress_pct, $3), updated_at = now() WHERE id = $1 AND state = 'analysing' AND revision = $2`,
          [recordingId, ordered.revision, progressPct],
        ),
      );
      return count > 0;
    },
    (watch) => analyse(organizationId, ordered, watch),
  );
}

async function analyse(organizationId: string, ordered: Ordered, watch: Watch): Promise<void> {
  const found = await levelsOrFailure(organizationId, ordered, watch);
  await inTransaction({ organizationId }, async () => {
    const still = await stillOrdered(ordered);
    if (!still) return;
    if ("code" in found) {
      await (isAcceptable(found.code)
        ? ask(ordered, found)
        : refuse(organizationId, ordered, found));
      return;
    }
    await execute(
      `UPDATE recordings SET state = 'analysed', analysis = $2::jsonb, failure = NULL, progress_pct = 100, file_id = CASE WHEN $3 THEN file_id END,
         updated_at = now(), revision = revision + 1 WHERE id = $1`,
      [ordered.recordingId, JSON.stringify(analysisOf(found)), still.isKept],
    );
    if (!still.isKept) await dropUnusedFile(organizationId, ordered.fileId);
    await recordAudit(
      { organizationId },
      {
        action: "analyse-recording",
        subjectKind: "recording",
        subjectId: ordered.recordingId,
        values: { isAudioKept: still.isKept },
      },
    );
  });
}

/** The row, locked, if the order is still the one that was taken up; it may be kept by now. */
const stillOrdered = ({ recordingId, revision }: Ordered) =>
  row<{ isKept: boolean }>(
    `SELECT delete_on IS NOT NULL AS "isKept" FROM recordings WHERE id = :recordingId AND state = 'analysing' AND revision = :revision FOR UPDATE`,
    { recordingId, revision },
  );

async function levelsOrFailure(
  organizationId: string,
  { sha256, calibration, accepted }: Ordered,
  { signal, onProgress }: Watch,
): Promise<RecordingLevels | Failure> {
  try {
    return await analyseRecording(
      fileStore().pathOf(organizationId, sha256),
      {
        kind: "levels",
        paPerFullScale: sensitivityOf(calibration),
        bands: true,
        // What microphone and recorder add by themselves is nobody's to say here.
        selfNoiseDb: null,
        accept: accepted.map(({ code }) => code),
      },
      { signal, onProgress: (share) => onProgress(100 * share) },
    );
  } catch (error) {
    if (!(error instanceof RecordingError)) throw error;
    return { code: error.code, params: { ...error.params } };
  }
}

function sensitivityOf(calibration: RecordingCalibration): number | null | (number | null)[] {
  switch (calibration.kind) {
    case "none":
      return null;
    case "sensitivity":
      return calibration.pascalPerFullScale;
    case "tone":
      return calibration.tone.channels.map((channel) => channel?.pascalPerFullScale ?? null);
  }
}

/** Asked about: the audio stays until the answer. */
async function ask({ recordingId }: Ordered, failure: Failure): Promise<void> {
  await execute(
    `UPDATE recordings SET state = 'asked', failure = $2::jsonb, progress_pct = 0, updated_at = now(), revision = revision + 1 WHERE id = $1`,
    [recordingId, JSON.stringify(failure)],
  );
}

/** It can't be used, and its audio goes. */
async function refuse(
  organizationId: string,
  { recordingId, fileId }: Ordered,
  failure: Failure,
): Promise<void> {
  await execute(
    `UPDATE recordings SET state = 'failed', failure = $2::jsonb, file_id = NULL, updated_at = now(), revision = revision + 1 WHERE id = $1`,
    [recordingId, JSON.stringify(failure)],
  );
  await dropUnusedFile(organizationId, fileId);
  await recordAudit(
    { organizationId },
    {
      action: "refuse-recording",
      subjectKind: "recording",
      subjectId: recordingId,
      values: { ...failure },
    },
  );
}

function analysisOf(found: RecordingLevels): RecordingAnalysis {
  const { durationS, rateHz, sampleFormat, faults, levels, silentChannels } = found;
  return {
    durationS,
    sampleRateHz: rateHz,
    sampleFormat,
    channels: levels.map((one, index) => channelOf(one, silentChannels.includes(index + 1))),
    faults: faults.map(({ code, params }) => ({ code, params: { ...params } })),
  };
}

function channelOf(levels: SoundLevels, isSilent: boolean): RecordingChannel {
  const { laeqDb, lceqDb, lcPeakDb, lafMaxDb, lasMaxDb, clipping } = levels;
  const bands = (found: SoundLevels["octaveBandsDb"]) =>
    (found ?? []).map(({ nominalHz, levelDb }) => ({ frequencyHz: nominalHz, levelDb }));
  return {
    isAbsolute: levels.reference === "absolute",
    isSilent,
    laeqDb,
    lceqDb,
    lcPeakDb,
    lafMaxDb,
    lasMaxDb,
    octaveBandsDb: bands(levels.octaveBandsDb),
    thirdOctavesDb: bands(levels.thirdOctaveBandsDb),
    clippedPct: clipping.sharePct,
  };
}
