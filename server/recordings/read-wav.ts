import { SAMPLE_RATES_HZ } from "../../shared/acoustics/signal/analyse-sound";
import { ByteQueue } from "./byte-queue";
import { RecordingError } from "./recording-error";

const FORMAT_PCM = 1;
const FORMAT_FLOAT = 3;
const FORMAT_EXTENSIBLE = 0xfffe;
/** What the extensible form's identifier ends in, whatever format it starts with. */
const EXTENSIBLE_TAIL = "000000001000800000aa00389b71";
/** "Longer than this field can say": in RF64 the length is in ds64, elsewhere nobody knew it yet. */
const LENGTH_ELSEWHERE = 0xffff_ffff;
const MAX_FORMAT_CHUNK = 4096;
const BLOCK_FRAMES = 16_384;

export type SampleFormat = "int16" | "int24" | "int32" | "float32" | "float64";

export interface WavFormat {
  readonly rateHz: number;
  readonly channels: 1 | 2;
  readonly sampleFormat: SampleFormat;
  /** Largest value that the samples' format holds, as a share of full scale; 1 for floating point. */
  readonly fullScale: number;
  /** Frames that the header promises; null where it does not say. */
  readonly statedFrames: number | null;
}

export interface WavReader {
  readonly format: WavFormat;
  /** One array per channel, ±1 at full scale. The arrays are used again for the next block. */
  readonly blocks: AsyncGenerator<Float32Array[], void, undefined>;
  /** Bytes taken from the source so far. */
  bytesRead(): number;
}

/**
 * Opens a RIFF, RF64 or BW64 recording that comes as a stream: integer PCM of 16, 24 or 32 bits or floating point, one
 * or two channels. Chunks it has no use for are passed over. Memory does not depend on the length.
 *
 * `blocks` ends in a RecordingError `recording-truncated` where the data are shorter than the header says, after all
 * that is there was given out; likewise `recording-longer` where they go on behind the length that it says, and
 * `recording-length-unstated` where it leaves the length open, or says none and there are data.
 *
 * @param sizeBytes of the whole file, where it is known: tells sound behind the stated end from another chunk.
 * @throws RecordingError
 */
export async function openWav(
  source: AsyncIterable<Uint8Array>,
  sizeBytes: number | null = null,
): Promise<WavReader> {
  const bytes = new ByteQueue(source);
  const opening = await bytes.take(12);
  const container = opening && latin(opening, 0, 4);
  if (
    !opening ||
    !["RIFF", "RF64", "BW64"].includes(container!) ||
    latin(opening, 8, 12) !== "WAVE"
  )
    throw new RecordingError("recording-not-wav");

  let format: Omit<WavFormat, "statedFrames"> | null = null;
  let longDataBytes: number | null = null;
  for (;;) {
    const head = await bytes.take(8);
    if (!head) throw new RecordingError(format ? "recording-empty" : "recording-header-damaged");
    const id = latin(head, 0, 4);
    const chunkBytes = new DataView(head.buffer, head.byteOffset).getUint32(4, true);
    if (id === "data") {
      if (!format) throw new RecordingError("recording-header-damaged");
      const dataBytes = chunkBytes === LENGTH_ELSEWHERE ? longDataBytes : chunkBytes;
      const frameBytes = format.channels * BYTES[format.sampleFormat];
      const bytesPerSecond = format.rateHz * frameBytes;
      const soundGoesOn = () => goesOn(bytes, sizeBytes, bytesPerSecond);
      if (dataBytes === 0 && !(await soundGoesOn())) throw new RecordingError("recording-empty");
      const isUnstated = dataBytes === null || dataBytes === 0;
      const statedFrames = isUnstated ? null : Math.floor(dataBytes / frameBytes);
      if (statedFrames === 0) throw new RecordingError("recording-empty");
      const whole = { ...format, statedFrames };
      const blocks = readBlocks(bytes, whole, soundGoesOn);
      return { format: whole, blocks, bytesRead: () => bytes.taken };
    }
    const padded = chunkBytes + (chunkBytes % 2);
    if (id === "ds64" || id === "fmt ") {
      if (chunkBytes > MAX_FORMAT_CHUNK) throw new RecordingError("recording-header-damaged");
      const body = await bytes.take(padded);
      if (!body) throw new RecordingError("recording-header-damaged");
      if (id === "fmt ") format = readFormat(body.subarray(0, chunkBytes));
      else if (container !== "RIFF") longDataBytes = readLongLength(body);
    } else await bytes.skip(padded);
  }
}

/** A chunk's name: four printable letters, the first no blank. */
const CHUNK_NAME = /^[!-~][ -~]{3}$/;
/** Less than this is padding, and no sound, s. */
const LEAST_MORE_S = 0.1;

/** Whether what follows is more sound: not the end with its padding, and not the head of another chunk. */
async function goesOn(
  bytes: ByteQueue,
  sizeBytes: number | null,
  bytesPerSecond: number,
): Promise<boolean> {
  const leftBytes = sizeBytes === null ? Number.POSITIVE_INFINITY : sizeBytes - bytes.taken;
  if (leftBytes < LEAST_MORE_S * bytesPerSecond) return false;
  const next = await bytes.peek(9);
  // Data of an odd length are padded by a byte.
  return next.length === 9 && ![0, 1].some((from) => isChunkHead(next.subarray(from), leftBytes));
}

function isChunkHead(bytes: Uint8Array, leftBytes: number): boolean {
  if (!CHUNK_NAME.test(latin(bytes, 0, 4))) return false;
  return (
    bytes.length < 8 || new DataView(bytes.buffer, bytes.byteOffset).getUint32(4, true) <= leftBytes
  );
}

const BYTES: Record<SampleFormat, number> = {
  int16: 2,
  int24: 3,
  int32: 4,
  float32: 4,
  float64: 8,
};

const latin = (bytes: Uint8Array, from: number, to: number) =>
  String.fromCharCode(...bytes.subarray(from, to));

function readLongLength(body: Uint8Array): number {
  if (body.length < 16) throw new RecordingError("recording-header-damaged");
  return Number(new DataView(body.buffer, body.byteOffset).getBigUint64(8, true));
}

function readFormat(body: Uint8Array): Omit<WavFormat, "statedFrames"> {
  if (body.length < 16) throw new RecordingError("recording-header-damaged");
  const view = new DataView(body.buffer, body.byteOffset, body.length);
  let tag = view.getUint16(0, true);
  const channels = view.getUint16(2, true);
  const rateHz = view.getUint32(4, true);
  const frameBytes = view.getUint16(12, true);
  const bits = view.getUint16(14, true);
  let validBits = bits;
  if (tag === FORMAT_EXTENSIBLE) {
    if (body.length < 40) throw new RecordingError("recording-header-damaged");
    const tail = Array.from(body.subarray(26, 40), (byte) => byte.toString(16).padStart(2, "0"));
    if (tail.join("") !== EXTENSIBLE_TAIL)
      throw new RecordingError("recording-compressed", { formatTag: FORMAT_EXTENSIBLE });
    tag = view.getUint16(24, true);
    validBits = view.getUint16(18, true) || bits;
  }
  if (tag !== FORMAT_PCM && tag !== FORMAT_FLOAT)
    throw new RecordingError("recording-compressed", { formatTag: tag });
  if (channels !== 1 && channels !== 2)
    throw new RecordingError("recording-channels-unsupported", { channels });
  if (!(SAMPLE_RATES_HZ as readonly number[]).includes(rateHz))
    throw new RecordingError("recording-rate-unsupported", { rateHz });
  const sampleFormat = `${tag === FORMAT_PCM ? "int" : "float"}${bits}`;
  if (!isSampleFormat(sampleFormat))
    throw new RecordingError("recording-format-unsupported", { bits });
  if (frameBytes !== channels * BYTES[sampleFormat])
    throw new RecordingError("recording-header-damaged");
  // 20 valid bits in a container of 24 are left-justified: they read as 24, but end at a lower number. A sample of 32
  // bits is held in 25 of them.
  const fullScale = tag === FORMAT_PCM ? 1 - 2 ** (1 - Math.min(validBits, bits, 25)) : 1;
  return { rateHz, channels, sampleFormat, fullScale };
}

const isSampleFormat = (name: string): name is SampleFormat => Object.hasOwn(BYTES, name);

async function* readBlocks(
  bytes: ByteQueue,
  format: WavFormat,
  soundGoesOn: () => Promise<boolean>,
): AsyncGenerator<Float32Array[], void, undefined> {
  const { channels, sampleFormat, statedFrames, rateHz } = format;
  const frameBytes = channels * BYTES[sampleFormat];
  const arrays = Array.from({ length: channels }, () => new Float32Array(BLOCK_FRAMES));
  let frames = 0;
  let isPastStated = false;
  for (;;) {
    isPastStated ||= frames === statedFrames && (await soundGoesOn());
    if (frames === statedFrames && !isPastStated) break;
    const left = statedFrames === null || isPastStated ? BLOCK_FRAMES : statedFrames - frames;
    const wanted = Math.min(BLOCK_FRAMES, left);
    const block = await bytes.takeUpTo(wanted * frameBytes);
    const count = Math.floor(block.length / frameBytes);
    if (count > 0) {
      toFloats(block, count, format, arrays);
      frames += count;
      yield count === BLOCK_FRAMES ? arrays : arrays.map((array) => array.subarray(0, count));
    }
    if (count < wanted) break;
  }
  if (frames === 0) throw new RecordingError("recording-empty");
  const foundS = frames / rateHz;
  if (statedFrames === null) throw new RecordingError("recording-length-unstated", { foundS });
  const statedS = statedFrames / rateHz;
  if (frames > statedFrames) throw new RecordingError("recording-longer", { statedS, foundS });
  if (frames < statedFrames) {
    throw new RecordingError("recording-truncated", {
      missingS: statedS - foundS,
      statedS,
      foundS,
    });
  }
}

/** Separates the channels and brings them to ±1. What is no number in a floating-point recording is damage. */
function toFloats(
  block: Uint8Array,
  frames: number,
  { channels, sampleFormat }: WavFormat,
  arrays: readonly Float32Array[],
): void {
  const view = new DataView(block.buffer, block.byteOffset, block.length);
  for (let channel = 0; channel < channels; channel++) {
    const array = arrays[channel]!;
    const step = channels * BYTES[sampleFormat];
    let at = channel * BYTES[sampleFormat];
    switch (sampleFormat) {
      case "int16":
        for (let frame = 0; frame < frames; frame++, at += step)
          array[frame] = (((block[at + 1]! << 24) | (block[at]! << 16)) >> 16) / 32_768;
        break;
      case "int24":
        for (let frame = 0; frame < frames; frame++, at += step)
          array[frame] =
            ((block[at + 2]! << 24) | (block[at + 1]! << 16) | (block[at]! << 8)) / 2_147_483_648;
        break;
      case "int32":
        for (let frame = 0; frame < frames; frame++, at += step)
          array[frame] = view.getInt32(at, true) / 2_147_483_648;
        break;
      case "float32":
        for (let frame = 0; frame < frames; frame++, at += step)
          array[frame] = view.getFloat32(at, true);
        break;
      case "float64":
        for (let frame = 0; frame < frames; frame++, at += step)
          array[frame] = view.getFloat64(at, true);
        break;
    }
    if (sampleFormat.startsWith("float") && !hasOnlyNumbers(array, frames))
      throw new RecordingError("recording-not-numbers");
  }
}

function hasOnlyNumbers(array: Float32Array, count: number): boolean {
  let sum = 0;
  for (let at = 0; at < count; at++) sum += Math.abs(array[at]!);
  return Number.isFinite(sum);
}
