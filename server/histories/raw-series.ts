import { MISSING } from "../../shared/acoustics/history";
import { toDb } from "../../shared/history-file/cells";
import type { HistoryMapping } from "../../shared/schemas/history";

/** A day of eighths of seconds, and as much again for lines that turn out to be repeated. */
export const ROWS_LIMIT = 2 * 691_200;

/** Marks among the levels, below every level that there is. */
export const OVER = MISSING + 1;
export const UNDER = MISSING + 2;

/** Lines as they were read: a time each and one level a channel, in the order of the file. */
export class RawSeries {
  count = 0;
  /** ms; of what clock, `isAbsolute` and the mapping say. */
  times = new Float64Array(32_768);
  lines = new Uint32Array(32_768);
  levels: Int16Array[];
  /** The file states its own zone: times are instants. */
  isAbsolute = false;

  constructor(channelCount: number) {
    this.levels = Array.from({ length: channelCount }, () => new Int16Array(32_768));
  }

  /** Room for one more line. */
  reserve(): void {
    if (this.count < this.times.length) return;
    const length = this.times.length * 2;
    const grown = <A extends Float64Array | Uint32Array | Int16Array>(into: A, from: A): A => {
      into.set(from);
      return into;
    };
    this.times = grown(new Float64Array(length), this.times);
    this.lines = grown(new Uint32Array(length), this.lines);
    this.levels = this.levels.map((old) => grown(new Int16Array(length), old));
  }
}

type Unit = HistoryMapping["levels"][number]["unit"];

/** Hundredths of a decibel of a value as written; NaN for no sound pressure at all. */
export function hundredthsOf(value: number, unit: Unit): number {
  // Tenths times ten are whole, where a hundred times a tenth of them is not.
  return unit === "dB/10" ? Math.round(value * 10) : Math.round(100 * toDb(value, unit));
}

/** No level that an instrument writes for a worker's noise is outside this, hundredths of a decibel. */
export const HIGHEST = 16_300;
export const LOWEST = -2_000;
