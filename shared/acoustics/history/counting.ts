import {
  type HistoryChannel,
  LONGEST_INTERVAL_S,
  MISSING,
  SHORTEST_INTERVAL_S,
  type Stretch,
} from "./types";

/** How often each level occurs; levels being whole hundredths, nothing is lost by it. */
export interface LevelCounts {
  /** By level in hundredths, offset by `OFFSET`. */
  readonly counts: Int32Array;
  readonly total: number;
  /** In hundredths; above `highest` where there is no level. */
  readonly lowest: number;
  readonly highest: number;
}

export const OFFSET = 32_768;

/** Samples of a history that a figure is taken over: those of a range that the mask has. */
export interface Part {
  readonly mask: Uint8Array;
  readonly fromIndex: number;
  readonly toIndex: number;
}

export function countLevels(levels: Int16Array, part: Part): LevelCounts {
  const counts = new Int32Array(2 * OFFSET);
  const { mask, fromIndex, toIndex } = part;
  let total = 0;
  let lowest = OFFSET;
  let highest = -OFFSET;
  for (let index = fromIndex; index < toIndex; index++) {
    const level = levels[index]!;
    if (mask[index] === 0 || level === MISSING) continue;
    counts[level + OFFSET]!++;
    total++;
    if (level < lowest) lowest = level;
    if (level > highest) highest = level;
  }
  return { counts, total, lowest, highest };
}

/** 1 for each sample that counts, 0 for each that a stretch leaves out. */
export function countedSamples(sampleCount: number, stretches: readonly Stretch[]): Uint8Array {
  const mask = new Uint8Array(sampleCount).fill(1);
  for (const { kind, fromIndex, toIndex } of stretches) {
    if (kind === "left-out") mask.fill(0, fromIndex, toIndex);
  }
  return mask;
}

export const wholePart = (mask: Uint8Array): Part => ({
  mask,
  fromIndex: 0,
  toIndex: mask.length,
});

/**
 * Number of samples of a history.
 *
 * @throws RangeError when channels, interval or stretches don't make one.
 */
export function sampleCountOf(
  channels: readonly HistoryChannel[],
  intervalS: number,
  stretches: readonly Stretch[],
): number {
  const [first] = channels;
  if (!first) throw new RangeError("A time history has at least one channel");
  const sampleCount = first.levels.length;
  const kinds = new Set(channels.map(({ kind }) => kind));
  if (kinds.size < channels.length) throw new RangeError("A kind of channel occurs twice");
  if (channels.some(({ levels }) => levels.length !== sampleCount))
    throw new RangeError("The channels of a time history are equally long");
  if (!(intervalS >= SHORTEST_INTERVAL_S && intervalS <= LONGEST_INTERVAL_S))
    throw new RangeError("A time history has one value per 1/8 s to 60 s");
  for (const { fromIndex, toIndex } of stretches) {
    const isWhole = Number.isInteger(fromIndex) && Number.isInteger(toIndex);
    if (!isWhole || fromIndex < 0 || toIndex < fromIndex || toIndex > sampleCount)
      throw new RangeError("A stretch lies within its time history");
  }
  return sampleCount;
}
