import type { HistoryChannel as Channel } from "../../shared/acoustics/history";
import { MISSING } from "../../shared/acoustics/history";
import type { HistoryChannel } from "../../shared/schemas/history";
import { kindOf } from "../histories/channels";
import { CHUNK_VALUES, unpackLevels } from "../histories/level-codec";
import { rows } from "../lib/db";

/** A chunk as it is stored. */
export interface StoredChunk {
  channel: HistoryChannel;
  position: number;
  valuesCount: number;
  packed: Buffer;
}

export interface LevelRange {
  historyId: string;
  channels: readonly HistoryChannel[];
  /** Values of the range; those outside it are not read. */
  fromIndex: number;
  toIndex: number;
}

/** The levels of a range, one array a channel, from the range's first value on. */
export async function levelsBetween({
  historyId,
  channels,
  fromIndex,
  toIndex,
}: LevelRange): Promise<Channel[]> {
  const chunks = await rows<StoredChunk>(
    `SELECT channel, position, values_count AS "valuesCount", packed FROM time_history_chunks
     WHERE history_id = :historyId AND position BETWEEN :first AND :last`,
    {
      historyId,
      first: Math.floor(fromIndex / CHUNK_VALUES),
      last: Math.floor(Math.max(fromIndex, toIndex - 1) / CHUNK_VALUES),
    },
  );
  return levelsFromChunks(chunks, { channels, fromIndex, toIndex });
}

/** The same out of chunks that are at hand. */
export function levelsFromChunks(
  chunks: readonly StoredChunk[],
  { channels, fromIndex, toIndex }: Omit<LevelRange, "historyId">,
): Channel[] {
  const levelsOf = new Map(
    channels.map((channel) => [channel, new Int16Array(toIndex - fromIndex).fill(MISSING)]),
  );
  for (const { channel, position, valuesCount, packed } of chunks) {
    const levels = unpackLevels(packed, valuesCount);
    const begin = position * CHUNK_VALUES;
    const [from, to] = [Math.max(fromIndex, begin), Math.min(toIndex, begin + valuesCount)];
    if (to > from)
      levelsOf.get(channel)?.set(levels.subarray(from - begin, to - begin), from - fromIndex);
  }
  return channels.map((channel) => ({ kind: kindOf(channel), levels: levelsOf.get(channel)! }));
}
