import { countLevels, OFFSET, wholePart } from "./counting";
import { MISSING } from "./types";

/**
 * Percentile levels LN, dB: the greatest level reached or exceeded in N percent of the samples or more. Null where no
 * sample has a value.
 *
 * @param mask 1 for each sample that counts (`countedSamples`).
 * @throws RangeError for a share that is not above 0 and at most 100.
 */
export function percentiles(
  levels: Int16Array,
  mask: Uint8Array,
  sharesPct: readonly number[],
): number[] | null {
  if (sharesPct.some((share) => !(share > 0 && share <= 100)))
    throw new RangeError("A percentile is above 0 and at most 100");
  const { counts, total, lowest, highest } = countLevels(levels, wholePart(mask));
  if (total === 0) return null;
  return sharesPct.map((share) => {
    // Shares such as 10 % of 30 samples are not whole in binary.
    const wanted = (share / 100) * total - 1e-9;
    let reached = 0;
    for (let level = highest; level > lowest; level--) {
      reached += counts[level + OFFSET]!;
      if (reached >= wanted) return level / 100;
    }
    return lowest / 100;
  });
}

export interface DistributionClass {
  /** The class holds levels from here up to, not including, the next. */
  readonly fromDb: number;
  readonly count: number;
  readonly sharePct: number;
}

/** How the levels spread over classes of 1 dB, empty ones in between included; empty where no sample has a value. */
export function distribution(levels: Int16Array, mask: Uint8Array): DistributionClass[] {
  const { counts, total, lowest, highest } = countLevels(levels, wholePart(mask));
  if (total === 0) return [];
  const first = Math.floor(lowest / 100);
  const classes = new Int32Array(Math.floor(highest / 100) - first + 1);
  for (let level = lowest; level <= highest; level++)
    classes[Math.floor(level / 100) - first]! += counts[level + OFFSET]!;
  return Array.from(classes, (count, place) => ({
    fromDb: first + place,
    count,
    sharePct: (100 * count) / total,
  }));
}

export interface Envelope {
  /** First sample of each bucket, and one past the last of all. */
  readonly edges: Int32Array;
  /** Least and greatest level of each bucket, hundredths of a decibel; `MISSING` where it has none. */
  readonly lowest: Int16Array;
  readonly highest: Int16Array;
}

/**
 * What a chart of a history draws: the range of levels in each of so many buckets of its samples from `fromIndex` to,
 * not including, `toIndex`. No more buckets than samples.
 *
 * @throws RangeError for less than one bucket, or a range that is not within the history.
 */
export function envelope(
  levels: Int16Array,
  buckets: number,
  fromIndex = 0,
  toIndex = levels.length,
): Envelope {
  if (!(buckets >= 1)) throw new RangeError("An envelope has at least one bucket");
  if (!(fromIndex >= 0 && fromIndex <= toIndex && toIndex <= levels.length))
    throw new RangeError("An envelope lies within its time history");
  const length = toIndex - fromIndex;
  const count = Math.min(Math.floor(buckets), length);
  const edges = new Int32Array(count + 1);
  const lowest = new Int16Array(count).fill(MISSING);
  const highest = new Int16Array(count).fill(MISSING);
  edges[0] = fromIndex;
  let index = fromIndex;
  for (let bucket = 0; bucket < count; bucket++) {
    const end = fromIndex + Math.ceil(((bucket + 1) * length) / count);
    let low = MISSING;
    let high = MISSING;
    for (; index < end; index++) {
      const level = levels[index]!;
      if (level === MISSING) continue;
      if (low === MISSING || level < low) low = level;
      if (level > high) high = level;
    }
    lowest[bucket] = low;
    highest[bucket] = high;
    edges[bucket + 1] = end;
  }
  return { edges, lowest, highest };
}
