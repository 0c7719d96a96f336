import {
  analyseSound,
  CalibrationTone,
  type SoundLevels,
  type ToneReading,
} from "../../shared/acoustics/signal";
import { ClipCounter } from "../../shared/acoustics/signal/clipping";
import { type AcceptableFault, isAcceptable } from "../../shared/schemas/recording";
import { openWav, type SampleFormat, type WavFormat, type WavReader } from "./read-wav";
import { RecordingError, type RecordingParams } from "./recording-error";

/** What is wanted of a recording. */
export type RecordingJob = LevelsJob | ToneJob;

export interface LevelsJob {
  readonly kind: "levels";
  /** Sound pressure at full scale, Pa, by channel or one for all; null or none: not known, relative levels only. */
  readonly paPerFullScale: number | null | readonly (number | null)[];
  readonly bands: boolean;
  /** A-weighted self noise of microphone and recorder, dB; at or under it a recording is silent. Null: not known. */
  readonly selfNoiseDb: number | null;
  /** Faults that somebody has accepted: the recording is used with them, and they are in the answer. */
  readonly accept: readonly AcceptableFault[];
}

export interface ToneJob {
  readonly kind: "tone";
  readonly toneLevelDb: number;
  readonly frequencyHz: number;
  readonly accept: readonly AcceptableFault[];
}

export interface RecordingFault {
  readonly code: AcceptableFault;
  readonly params: RecordingParams;
}

interface RecordingFacts {
  readonly rateHz: number;
  readonly channels: number;
  readonly sampleFormat: SampleFormat;
  readonly durationS: number;
  /** Those that were accepted. */
  readonly faults: readonly RecordingFault[];
}

export interface RecordingLevels extends RecordingFacts {
  /** By channel. */
  readonly levels: readonly SoundLevels[];
  /** Channels, from 1, that hold nothing above the self noise while another does. */
  readonly silentChannels: readonly number[];
}

export interface RecordingTones extends RecordingFacts {
  /** By channel; at least one was found. */
  readonly tones: readonly ToneReading[];
}

export type RecordingResult<Job extends RecordingJob> = Job extends LevelsJob
  ? RecordingLevels
  : RecordingTones;

export interface RecordingSource {
  readonly bytes: AsyncIterable<Uint8Array>;
  /** Null: not known before its end. */
  readonly sizeBytes: number | null;
}

/**
 * Reads a recording from its first byte to its last and answers the job.
 *
 * @throws RecordingError where it cannot be used, or has a fault that nobody accepted.
 */
export async function runRecordingJob(
  source: RecordingSource,
  job: RecordingJob,
  onShare: (share: number) => void,
): Promise<RecordingLevels | RecordingTones> {
  const reader = await openWav(source.bytes, source.sizeBytes);
  const faults: RecordingFault[] = [];
  const refuseOrKeep = (error: RecordingError) => {
    const { code } = error;
    if (!isAcceptable(code) || !job.accept.includes(code)) throw error;
    faults.push({ code, params: error.params });
  };
  const shortfall = promisedTooMuch(reader, source.sizeBytes);
  if (shortfall && !job.accept.includes("recording-truncated")) throw shortfall;

  const { format } = reader;
  const feed = job.kind === "levels" ? levelsFeed(job, format) : toneFeed(job, format);
  const allBytes = source.sizeBytes ?? reader.bytesRead() + dataBytes(format);
  let frames = 0;
  let share = 0;
  try {
    for await (const block of reader.blocks) {
      feed.take(block);
      frames += block[0]!.length;
      const now = Math.min(1, reader.bytesRead() / allBytes);
      if (now < share + 0.01) continue;
      share = now;
      onShare(share);
    }
  } catch (error) {
    if (!(error instanceof RecordingError)) throw error;
    refuseOrKeep(error);
  }
  const found = feed.finish(refuseOrKeep);
  const { rateHz, channels, sampleFormat } = format;
  return { rateHz, channels, sampleFormat, durationS: frames / rateHz, faults, ...found };
}

const sampleBytes = (format: WavFormat) => Number(format.sampleFormat.replace(/\D+/, "")) / 8;
const dataBytes = (format: WavFormat) =>
  (format.statedFrames ?? Number.NaN) * format.channels * sampleBytes(format);

/** A header that promises more than the file has left is known to lie before the rest is read. */
function promisedTooMuch(reader: WavReader, sizeBytes: number | null): RecordingError | null {
  const { format } = reader;
  if (sizeBytes === null || format.statedFrames === null) return null;
  const frameBytes = format.channels * sampleBytes(format);
  const foundFrames = Math.floor((sizeBytes - reader.bytesRead()) / frameBytes);
  if (foundFrames >= format.statedFrames) return null;
  if (foundFrames <= 0) return new RecordingError("recording-empty");
  const statedS = format.statedFrames / format.rateHz;
  const foundS = foundFrames / format.rateHz;
  return new RecordingError("recording-truncated", { missingS: statedS - foundS, statedS, foundS });
}

interface Feed {
  take(block: readonly Float32Array[]): void;
  finish(
    refuseOrKeep: (error: RecordingError) => void,
  ): Pick<RecordingLevels, "levels" | "silentChannels"> | Pick<RecordingTones, "tones">;
}

function levelsFeed(job: LevelsJob, format: WavFormat): Feed {
  const { rateHz, channels, fullScale } = format;
  const given = job.paPerFullScale;
  const paPerFullScale = Array.from({ length: channels }, (_, channel) =>
    typeof given === "number" || given === null ? given : (given[channel] ?? null),
  );
  const analysis = analyseSound({ rateHz, channels, fullScale, bands: job.bands, paPerFullScale });
  return {
    take: (block) => analysis.feed(block),
    finish(refuseOrKeep) {
      const levels = analysis.finish();
      const silentChannels = levels.flatMap((level, index) =>
        isSilent(level, paPerFullScale[index] ?? null, format, job.selfNoiseDb) ? [index + 1] : [],
      );
      if (silentChannels.length === channels) throw new RecordingError("recording-silent");
      for (const [index, { clipping }] of levels.entries())
        refuseClipped(index, clipping, refuseOrKeep);
      return { levels, silentChannels };
    },
  };
}

/** At or under the self noise where that is known; else under the smallest step that the format has. */
function isSilent(
  level: SoundLevels,
  paPerFullScale: number | null,
  format: WavFormat,
  selfNoiseDb: number | null,
): boolean {
  if (level.laeqDb === null || level.lzeqDb === null) return true;
  if (level.reference === "absolute" && selfNoiseDb !== null) return level.laeqDb <= selfNoiseDb;
  const stepDb = 20 * Math.log10(format.sampleFormat === "int16" ? 2 ** -15 : 2 ** -23);
  const scaleDb = paPerFullScale === null ? 0 : 20 * Math.log10(paPerFullScale / 20e-6);
  return level.lzeqDb - scaleDb < stepDb;
}

function refuseClipped(
  index: number,
  { runs, samples, sharePct }: SoundLevels["clipping"],
  refuseOrKeep: (error: RecordingError) => void,
): void {
  if (runs === 0) return;
  const params = { channel: index + 1, runs, samples, sharePct };
  refuseOrKeep(new RecordingError("recording-clipped", params));
}

function toneFeed(job: ToneJob, format: WavFormat): Feed {
  const { rateHz, channels, fullScale } = format;
  const { toneLevelDb, frequencyHz } = job;
  const readings = Array.from(
    { length: channels },
    () => new CalibrationTone({ rateHz, toneLevelDb, frequencyHz }),
  );
  const clips = readings.map(() => new ClipCounter(fullScale));
  return {
    take(block) {
      for (const [index, samples] of block.entries()) {
        readings[index]!.feed(samples);
        clips[index]!.process(samples, samples.length);
      }
    },
    finish(refuseOrKeep) {
      for (const [index, clip] of clips.entries()) refuseClipped(index, clip, refuseOrKeep);
      const tones = readings.map((reading) => reading.finish());
      if (!tones.some(({ found }) => found)) throw noTone(tones);
      return { tones };
    },
  };
}

/** Of several channels the one that came nearest says why. */
function noTone(tones: readonly ToneReading[]): RecordingError {
  const codes = {
    "frequency-off": "tone-frequency-off",
    unsteady: "tone-unsteady",
    "no-tone": "tone-not-found",
  } as const;
  for (const [reason, code] of Object.entries(codes)) {
    const tone = tones.find((one) => !one.found && one.reason === reason);
    if (!tone) continue;
    return new RecordingError(
      code,
      tone.frequencyHz === null ? {} : { frequencyHz: tone.frequencyHz },
    );
  }
  return new RecordingError("tone-not-found");
}
