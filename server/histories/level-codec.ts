import { constants, deflateRawSync, inflateRawSync } from "node:zlib";
import { MISSING } from "../../shared/acoustics/history";

/** Values of one chunk: an hour at one a second. */
export const CHUNK_VALUES = 3600;

/**
 * A packed chunk: one byte of flags, the step in hundredths (two bytes), the runs of missing values, then two planes of
 * bytes, the low ones first. Values are multiples of the step; each is stored itself or as its difference from the one
 * before, whichever spreads less. A plane is deflated where that makes it shorter.
 */
const IS_DELTA = 1;
const LOW_DEFLATED = 2;
const HIGH_DEFLATED = 4;

const zigzag = (value: number) => (value << 1) ^ (value >> 31);
const unzigzag = (value: number) => (value >>> 1) ^ -(value & 1);

/** Lengths of the runs of present and missing values, in turn, beginning with present ones. */
function runsOf(levels: Int16Array): number[] {
  const runs: number[] = [];
  let isMissing = false;
  let length = 0;
  for (const level of levels) {
    if ((level === MISSING) !== isMissing) {
      runs.push(length);
      isMissing = !isMissing;
      length = 0;
    }
    length += 1;
  }
  runs.push(length);
  return runs;
}

/** What all values are a multiple of: 10 where an instrument writes tenths. Lossless by construction. */
function stepOf(levels: Int16Array): number {
  let step = 0;
  for (const level of levels) {
    if (level === MISSING || (step > 0 && level % step === 0)) continue;
    let [a, b] = [step, Math.abs(level)];
    while (b !== 0) [a, b] = [b, a % b];
    step = a;
    if (step === 1) return 1;
  }
  return step === 0 ? 1 : step;
}

/** n·log2 n, for counting bits. */
const N_LOG_N = Float64Array.from({ length: CHUNK_VALUES + 1 }, (_, n) =>
  n === 0 ? 0 : n * Math.log2(n),
);

/** Bits that both planes take by themselves, taken of every fourth value: enough to choose by. */
function bitsOf(levels: Int16Array, step: number, isDelta: boolean, base: number): number {
  const low = new Int32Array(256);
  const high = new Int32Array(256);
  for (let index = 1; index < levels.length; index += 4) {
    const level = levels[index]!;
    const before = levels[index - 1]!;
    if (level === MISSING || before === MISSING) continue;
    const code = zigzag((isDelta ? level - before : level - base * step) / step);
    low[code & 255]! += 1;
    high[(code >> 8) & 255]! += 1;
  }
  let bits = 0;
  for (let byte = 0; byte < 256; byte++) bits -= N_LOG_N[low[byte]!]! + N_LOG_N[high[byte]!]!;
  return bits;
}

function planesOf(levels: Int16Array, step: number, isDelta: boolean, base: number) {
  const low = new Uint8Array(levels.length);
  const high = new Uint8Array(levels.length);
  let before = isDelta ? 0 : base;
  let kept = base;
  for (let index = 0; index < levels.length; index++) {
    const level = levels[index]!;
    const value = level === MISSING ? kept : level / step;
    const code = zigzag(value - before);
    low[index] = code & 255;
    high[index] = code >> 8;
    kept = value;
    if (isDelta) before = value;
  }
  return { low, high };
}

/** Levels repeat as runs and by how often they occur; longer patterns are not worth the search. */
function deflated(plane: Uint8Array): [Uint8Array, boolean] {
  const short = deflateRawSync(plane, { strategy: constants.Z_RLE, memLevel: 9 });
  return short.length < plane.length ? [short, true] : [plane, false];
}

const varint = (value: number): number[] =>
  value < 128 ? [value] : [(value & 127) | 128, ...varint(value >>> 7)];

/**
 * Packs levels in hundredths of a decibel, `MISSING` among them. Nothing is lost. Never longer than two bytes a value and
 * some for the runs of missing ones, whatever the levels are.
 *
 * @throws RangeError for levels beyond ±163 dB, which no instrument writes.
 */
export function packLevels(levels: Int16Array): Buffer {
  if (levels.length === 0) return Buffer.alloc(0);
  for (const level of levels)
    if (level !== MISSING && Math.abs(level) > 16_383)
      throw new RangeError("a level of no instrument");
  const step = stepOf(levels);
  let sum = 0;
  let count = 0;
  for (const level of levels) {
    if (level === MISSING) continue;
    sum += level;
    count += 1;
  }
  const base = count === 0 ? 0 : Math.round(sum / count / step);
  const isDelta = bitsOf(levels, step, true, base) < bitsOf(levels, step, false, base);
  const planes = planesOf(levels, step, isDelta, base);
  const [low, isLowDeflated] = deflated(planes.low);
  const [high, isHighDeflated] = deflated(planes.high);
  const flags =
    (isDelta ? IS_DELTA : 0) |
    (isLowDeflated ? LOW_DEFLATED : 0) |
    (isHighDeflated ? HIGH_DEFLATED : 0);
  const runs = runsOf(levels);
  const head = [
    flags,
    step & 255,
    step >> 8,
    ...varint(zigzag(base)),
    ...varint(runs.length),
    ...runs.flatMap(varint),
    ...varint(low.length),
  ];
  return Buffer.concat([Uint8Array.from(head), low, high]);
}

/**
 * The levels of a packed chunk.
 *
 * @throws RangeError for bytes that are no chunk of so many values.
 */
export function unpackLevels(packed: Uint8Array, valuesCount: number): Int16Array {
  const levels = new Int16Array(valuesCount);
  if (valuesCount === 0) return levels;
  let place = 3;
  const readVarint = (): number => {
    let value = 0;
    for (let shift = 0; shift < 35; shift += 7) {
      const byte = packed[place++];
      if (byte === undefined) break;
      value |= (byte & 127) << shift;
      if (byte < 128) return value;
    }
    throw new RangeError("these bytes are no chunk of levels");
  };
  const flags = packed[0] ?? 0;
  const step = (packed[1] ?? 0) | ((packed[2] ?? 0) << 8);
  const base = unzigzag(readVarint());
  const runs = Array.from({ length: Math.min(readVarint(), valuesCount + 2) }, readVarint);
  const lowLength = readVarint();
  const plane = (bytes: Uint8Array, isDeflated: boolean) =>
    isDeflated ? inflateRawSync(bytes, { maxOutputLength: valuesCount }) : bytes;
  const low = plane(packed.subarray(place, place + lowLength), (flags & LOW_DEFLATED) !== 0);
  const high = plane(packed.subarray(place + lowLength), (flags & HIGH_DEFLATED) !== 0);
  const length = runs.reduce((total, run) => total + run, 0);
  if (low.length !== valuesCount || high.length !== valuesCount || length !== valuesCount)
    throw new RangeError("these bytes are no chunk of levels");
  const isDelta = (flags & IS_DELTA) !== 0;
  let before = isDelta ? 0 : base;
  for (let index = 0; index < valuesCount; index++) {
    const value = before + unzigzag(low[index]! | (high[index]! << 8));
    levels[index] = value * step;
    if (isDelta) before = value;
  }
  let at = 0;
  runs.forEach((run, turn) => {
    if (turn % 2 === 1) levels.fill(MISSING, at, at + run);
    at += run;
  });
  return levels;
}
