import { createReadStream } from "node:fs";
import { stat } from "node:fs/promises";
import {
  MicrophonePair,
  type MicrophonePairReading,
  SHORTEST_PAIR_S,
} from "../../shared/acoustics/signal/two-microphones";
import type { CheckCode, CheckPart } from "../../shared/schemas/microphone-check";
import { openWav, type WavReader } from "./read-wav";
import { RecordingError, type RecordingParams } from "./recording-error";

/** Channels of one file lie this far apart at most, s: a sound needs 3 ms a metre. */
const LAG_IN_ONE_FILE_S = 0.02;
/** Two recorders are started by hand. */
const LAG_OF_TWO_FILES_S = 2;
/** Files that differ by more are said to, s. */
const LENGTHS_AGREE_S = 1;
/** A click may clip; from here on, percent of the samples, what is clipped is the noise. Common practice, no source. */
const CLIPPED_AT_MOST_PCT = 0.1;

/** What a thread is asked: paths of the files, and which channels of them make a pair. */
export interface PairTask {
  readonly paths: readonly string[];
  readonly parts: readonly CheckPart[];
  readonly outsidePa: number | null;
  readonly insidePa: number | null;
}

interface PairRefusal {
  readonly code: CheckCode | RecordingError["code"];
  readonly params: RecordingParams;
}

export type PairReply =
  | {
      readonly readings: readonly MicrophonePairReading[];
      readonly warnings: readonly CheckCode[];
    }
  | { readonly refused: PairRefusal };

class PairError extends Error {
  constructor(
    readonly code: CheckCode,
    readonly params: RecordingParams = {},
  ) {
    super(code);
  }
}

/** Reads each part's pair of channels from beginning to end. What can't be used is refused by name. */
export async function readPairs(
  task: PairTask,
  onProgress: (progressPct: number) => void,
): Promise<PairReply> {
  const readings: MicrophonePairReading[] = [];
  const warnings = new Set<CheckCode>();
  try {
    for (const [index, part] of task.parts.entries()) {
      const reading = await readPair(
        task,
        part,
        (share) => onProgress((100 * (index + share)) / task.parts.length),
        (warning) => warnings.add(warning),
      );
      refuseUseless(reading, part);
      if (Object.values(reading.clippedPct).some((pct) => pct > 0)) warnings.add("channel-clipped");
      readings.push(reading);
    }
  } catch (error) {
    if (!(error instanceof RecordingError || error instanceof PairError)) throw error;
    return { refused: { code: error.code, params: error.params } };
  }
  return { readings, warnings: [...warnings] };
}

async function readPair(
  { paths, outsidePa, insidePa }: PairTask,
  { active, outside, inside }: CheckPart,
  onShare: (share: number) => void,
  warn: (code: CheckCode) => void,
): Promise<MicrophonePairReading> {
  const isOneFile = outside.file === inside.file;
  const first = await open(paths[outside.file]);
  const second = isOneFile ? first : await open(paths[inside.file]);
  for (const [{ reader }, { channel }] of [
    [first, outside],
    [second, inside],
  ] as const)
    if (channel > reader.format.channels) throw new PairError("one-channel-only", { active });
  const [ours, theirs] = [first.reader.format, second.reader.format];
  if (ours.rateHz !== theirs.rateHz)
    throw new PairError("rates-differ", {
      active,
      outsideHz: ours.rateHz,
      insideHz: theirs.rateHz,
    });
  const pair = new MicrophonePair({
    rateHz: ours.rateHz,
    outsidePa,
    insidePa,
    step: Math.max(stepOf(ours.sampleFormat), stepOf(theirs.sampleFormat)),
    fullScale: Math.min(ours.fullScale, theirs.fullScale),
    maxLagS: isOneFile ? LAG_IN_ONE_FILE_S : LAG_OF_TWO_FILES_S,
  });
  const take = (x: readonly Float32Array[], y: readonly Float32Array[]) => {
    const [from, into] = [x[outside.channel - 1]!, y[inside.channel - 1]!];
    const length = Math.min(from.length, into.length);
    pair.feed(from.subarray(0, length), into.subarray(0, length));
    onShare(Math.min(1, first.reader.bytesRead() / first.sizeBytes));
  };
  if (isOneFile) for await (const block of whatIsThere(first.reader)) take(block, block);
  else {
    const [x, y] = [whatIsThere(first.reader), whatIsThere(second.reader)];
    for (;;) {
      const [one, other] = [await x.next(), await y.next()];
      if (one.done || other.done) break;
      take(one.value, other.value);
    }
    await Promise.all([x.return(), y.return()]);
    const lengths = [ours, theirs].map(({ statedFrames }) => statedFrames);
    if (lengths[0] != null && lengths[1] != null)
      if (Math.abs(lengths[0] - lengths[1]) > LENGTHS_AGREE_S * ours.rateHz) warn("lengths-differ");
  }
  return pair.finish();
}

async function open(path: string | undefined): Promise<{ reader: WavReader; sizeBytes: number }> {
  if (path === undefined) throw new Error("a part names a file that is not there");
  const { size } = await stat(path);
  const reader = await openWav(createReadStream(path, { highWaterMark: 1 << 20 }));
  return { reader, sizeBytes: size };
}

/** A recording that ends early, or does not say where it ends, counts as far as it is there. */
async function* whatIsThere({
  blocks,
}: WavReader): AsyncGenerator<Float32Array[], void, undefined> {
  try {
    yield* blocks;
  } catch (error) {
    const isShort =
      error instanceof RecordingError &&
      (error.code === "recording-truncated" || error.code === "recording-length-unstated");
    if (!isShort) throw error;
  }
}

/** Smallest step of a format, as a share of full scale; samples are held in 25 bits at the most. */
const stepOf = (sampleFormat: string): number =>
  sampleFormat.startsWith("int")
    ? 2 ** (1 - Math.min(25, Number(sampleFormat.slice(3))))
    : 2 ** -24;

function refuseUseless(reading: MicrophonePairReading, { active }: CheckPart): void {
  const { durationS, deadChannel, clippedPct } = reading;
  if (durationS < SHORTEST_PAIR_S)
    throw new PairError("too-short", { active, foundS: durationS, neededS: SHORTEST_PAIR_S });
  if (deadChannel) throw new PairError("channel-dead", { active, channel: deadChannel });
  for (const [channel, sharePct] of Object.entries(clippedPct))
    if (sharePct > CLIPPED_AT_MOST_PCT)
      throw new PairError("channel-clipped", { active, channel, sharePct });
}
