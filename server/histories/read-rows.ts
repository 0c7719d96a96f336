import { MISSING } from "../../shared/acoustics/history";
import {
  DAY_MS,
  type DateOrder,
  dayMsOf,
  readDate,
  readElapsed,
  readTime,
  readValue,
  signAfter,
  splitLine,
} from "../../shared/history-file/cells";
import type { HistoryMapping } from "../../shared/schemas/history";
import type { IssueList } from "./issue-list";
import { HIGHEST, hundredthsOf, LOWEST, OVER, RawSeries, ROWS_LIMIT, UNDER } from "./raw-series";

const LF = 10;
const CR = 13;
const SPACE = 32;
const QUOTE = 34;
const ZERO = 48;
const NINE = 57;
const COLON = 58;

/** What a column is, by its place; a column that nobody mapped is 0. */
const SKIPPED = 0;
const DATE_TIME = 1;
const DATE = 2;
const TIME = 3;
const ELAPSED = 4;
const LEVEL = 16;

const LONGEST_MS = DAY_MS + 7_200_000;

/** A file that goes on with lines that say no time has no history in them. */
const FOOT_LIMIT = 200;

export interface ChannelMarks {
  missing: number;
  firstMissingLine: number;
  over: number;
  firstOverLine: number;
  under: number;
  firstUnderLine: number;
  /** Values beyond what is believed, by the largest of them as written. */
  strange: number;
  firstStrangeLine: number;
  strangest: number;
  /** Numbers with a sign after them that nobody has explained. */
  signed: { line: number; text: string; sign: string; count: number } | null;
  rounded: number;
  lowest: number;
  highest: number;
}

/**
 * Takes lines in and keeps a time and the mapped levels of each. Plain lines of digits are read from their bytes; any
 * other one is split into cells and read with all that cells may hold.
 */
export class RowReader {
  readonly series: RawSeries;
  readonly marks: ChannelMarks[];
  /** Dates that could be read in another order too, the first of them. */
  ambiguousDate: { line: number; text: string } | null = null;
  isDateCertain = false;
  isFull = false;
  private readonly kinds: Uint8Array;
  private readonly lastColumn: number;
  private readonly decimalByte: number;
  private readonly delimiterByte: number;
  private readonly isPlainPossible: boolean;
  private readonly places = new Int32Array(8);
  private readonly lengths = new Int32Array(8);
  private readonly row: Int16Array;
  /** Of the plain lines, hundredths. */
  private readonly lowest: Int16Array;
  private readonly highest: Int16Array;
  private dayKey = -1;
  private dayMs = 0;
  private timeMs = 0;
  private lastTimeOfDay = -1;
  private turnedDays = 0;
  private unread: { line: number; text: string; count: number } | null = null;
  private readonly startMs: number;
  private at = 0;
  /** Cells of the first line that was kept: what a whole line looks like. */
  private sampleCells: string[] | null = null;
  /** What stood before the clock in the last cell with a date: the next line mostly has the same there. */
  private readonly datePrefix = new Uint8Array(24);
  private prefixLength = 0;
  private prefixMs = 0;

  constructor(
    private readonly mapping: HistoryMapping,
    private readonly issues: IssueList,
    private readonly decode: (bytes: Uint8Array) => string,
    private readonly heads: readonly string[],
  ) {
    const { levels, time } = mapping;
    this.series = new RawSeries(levels.length);
    this.row = new Int16Array(levels.length);
    this.lowest = new Int16Array(levels.length).fill(32_767);
    this.highest = new Int16Array(levels.length).fill(MISSING);
    this.marks = levels.map(() => ({
      missing: 0,
      firstMissingLine: 0,
      over: 0,
      firstOverLine: 0,
      under: 0,
      firstUnderLine: 0,
      strange: 0,
      firstStrangeLine: 0,
      strangest: 0,
      signed: null,
      rounded: 0,
      lowest: Number.POSITIVE_INFINITY,
      highest: Number.NEGATIVE_INFINITY,
    }));
    const timeColumns: [number, number][] =
      time.kind === "date-and-time"
        ? [
            [time.dateColumn, DATE],
            [time.timeColumn, TIME],
          ]
        : [
            [
              time.column,
              { "date-time": DATE_TIME, "time-of-day": TIME, elapsed: ELAPSED }[time.kind],
            ],
          ];
    this.lastColumn = Math.max(
      ...levels.map(({ column }) => column),
      ...timeColumns.map(([column]) => column),
    );
    this.kinds = new Uint8Array(this.lastColumn + 1);
    levels.forEach(({ column }, index) => {
      this.kinds[column] = LEVEL + index;
    });
    for (const [column, kind] of timeColumns) this.kinds[column] = kind;
    this.decimalByte = mapping.decimal.charCodeAt(0);
    this.delimiterByte = mapping.delimiter.charCodeAt(0);
    this.isPlainPossible =
      mapping.delimiter !== " " &&
      mapping.decimal !== mapping.delimiter &&
      levels.every(({ unit }) => unit !== "Pa") &&
      !(time.kind === "elapsed" && time.unit !== "hh:mm:ss");
    this.startMs = startOf(mapping.startsAt) ?? 0;
    if (time.kind === "time-of-day") this.dayMs = Math.floor(this.startMs / DAY_MS) * DAY_MS;
  }

  /** Takes the lines of a part of a buffer that ends with a line feed; `firstLine` counts from 1. Says how many there were. */
  takeBytes(bytes: Uint8Array, from: number, to: number, firstLine: number): number {
    let line = firstLine;
    let at = from;
    while (at < to && !this.isFull) {
      const begin = at;
      if (this.isPlainPossible && this.readPlain(bytes, at, line)) at = this.at;
      else {
        let end = bytes.indexOf(LF, begin);
        if (end < 0 || end > to) end = to;
        at = end + 1;
        const isCarried = end > begin && bytes[end - 1] === CR;
        this.takeLine(this.decode(bytes.subarray(begin, isCarried ? end - 1 : end)), line);
      }
      if (this.sampleCells === null && this.series.count > 0) {
        const end = at > begin + 1 && bytes[at - 2] === CR ? at - 2 : at - 1;
        this.sampleCells = splitLine(
          this.decode(bytes.subarray(begin, end)),
          this.mapping.delimiter,
        );
      }
      line += 1;
    }
    return line - firstLine;
  }

  takeLine(text: string, line: number): void {
    if (text.trim() === "") return;
    const { delimiter } = this.mapping;
    this.takeCells(splitLine(text, delimiter), line);
  }

  /** A last line without its end: taken where it is whole, dropped where it was cut off. */
  takeLast(text: string, line: number): boolean {
    if (text.trim() === "") return true;
    const cells = splitLine(text, this.mapping.delimiter);
    const sample = this.sampleCells;
    if (cells.length < (sample?.length ?? this.lastColumn + 1)) return false;
    // Cut off within a number it still looks like one.
    const end = cells.length - 1;
    if (sample && decimalsIn(cells[end]!) < decimalsIn(sample[end]!)) return false;
    this.takeCells(cells, line);
    return true;
  }

  /** All that a cell may be; for lines that are not plain, and for workbooks. */
  takeCells(cells: readonly string[], line: number): void {
    if (cells.every((cell) => cell === "")) return;
    const time = this.timeOfCells(cells, line);
    if (time === null) {
      if (this.isHeadAgain(cells)) {
        this.issues.add("told", "head-repeated", line);
        return;
      }
      this.unread ??= { line, text: cells.join(" ").slice(0, 80), count: 0 };
      this.unread.count += 1;
      if (this.unread.count > FOOT_LIMIT) this.isFull = true;
      return;
    }
    this.tellUnread();
    if (cells.length <= this.lastColumn) {
      this.issues.add("refused", "cells-missing", line, { count: cells.length });
      return;
    }
    const { levels } = this.mapping;
    for (let index = 0; index < levels.length; index++) {
      const { column, unit } = levels[index]!;
      this.row[index] = this.levelOfCell(cells[column]!, unit, index, line);
    }
    this.keep(time, line);
  }

  /** What was left unread: at the end of a file its foot, anywhere else a fault. */
  finish(): void {
    this.marks.forEach(({ signed }, index) => {
      if (!signed) return;
      const { line, ...params } = signed;
      this.issues.add("refused", "levels-with-a-sign", line, params, this.columnName(index));
    });
    this.mapping.levels.forEach(({ unit }, index) => {
      if (this.highest[index]! < this.lowest[index]!) return;
      const marks = this.marks[index]!;
      const scale = unit === "dB" ? 100 : 10;
      marks.lowest = Math.min(marks.lowest, this.lowest[index]! / scale);
      marks.highest = Math.max(marks.highest, this.highest[index]! / scale);
    });
    if (!this.unread) return;
    const { line, text, count } = this.unread;
    if (this.series.count === 0 || count > FOOT_LIMIT)
      this.issues.add("refused", "not-a-time", line, { text });
    else this.issues.add("asked", "foot-lines", line, { count, text });
  }

  private tellUnread(): void {
    if (!this.unread) return;
    const { line, text, count } = this.unread;
    this.issues.add("refused", "not-a-time", line, { text, count });
    this.unread = null;
  }

  private isHeadAgain(cells: readonly string[]): boolean {
    return (
      this.series.count > 0 &&
      this.heads.length > 0 &&
      cells.length === this.heads.length &&
      cells.every((cell, index) => cell === this.heads[index])
    );
  }

  private levelOfCell(
    cell: string,
    unit: HistoryMapping["levels"][number]["unit"],
    index: number,
    line: number,
  ): number {
    const value = readValue(cell, this.mapping);
    switch (value) {
      case "missing":
        return this.markMissing(index, line);
      case "over": {
        const marks = this.marks[index]!;
        if (marks.over++ === 0) marks.firstOverLine = line;
        return OVER;
      }
      case "under": {
        const marks = this.marks[index]!;
        if (marks.under++ === 0) marks.firstUnderLine = line;
        return UNDER;
      }
      case "unreadable":
        if (this.isSigned(cell, index, line)) return MISSING;
        this.issues.add(
          "refused",
          "not-a-level",
          line,
          { text: cell.slice(0, 40) },
          this.columnName(index),
        );
        return MISSING;
      default: {
        const hundredths = hundredthsOf(value, unit);
        return this.believe(hundredths, value, index, line);
      }
    }
  }

  /** Thousands of lines may have the same sign: it is told once. */
  private isSigned(cell: string, index: number, line: number): boolean {
    const sign = signAfter(cell);
    if (sign === null) return false;
    const marks = this.marks[index]!;
    marks.signed ??= { line, text: cell.slice(0, 40), sign, count: 0 };
    marks.signed.count += 1;
    return true;
  }

  private markMissing(index: number, line: number): number {
    const marks = this.marks[index]!;
    if (marks.missing++ === 0) marks.firstMissingLine = line;
    return MISSING;
  }

  /** A level that may be, or what is written down about one that can't. */
  private believe(hundredths: number, written: number, index: number, line: number): number {
    const marks = this.marks[index]!;
    if (written < marks.lowest) marks.lowest = written;
    if (written > marks.highest) marks.highest = written;
    if (hundredths <= HIGHEST && hundredths >= LOWEST) return hundredths;
    if (marks.strange++ === 0) marks.firstStrangeLine = line;
    if (Math.abs(written) > Math.abs(marks.strangest)) marks.strangest = written;
    return MISSING;
  }

  columnName(index: number): string {
    const { column } = this.mapping.levels[index]!;
    return this.heads[column] || String(column + 1);
  }

  private keep(timeMs: number, line: number): void {
    const { series } = this;
    if (series.count >= ROWS_LIMIT) {
      this.issues.add("refused", "too-many-values", line, { limit: ROWS_LIMIT });
      this.isFull = true;
      return;
    }
    series.reserve();
    const place = series.count;
    series.times[place] = timeMs;
    series.lines[place] = line;
    for (let index = 0; index < this.row.length; index++)
      series.levels[index]![place] = this.row[index]!;
    series.count = place + 1;
    // No history is that long, whatever the site's clock did meanwhile: the rest need not be read to say so.
    if (timeMs - series.times[0]! > LONGEST_MS) this.isFull = true;
  }

  private timeOfCells(cells: readonly string[], line: number): number | null {
    const { time, dateOrder } = this.mapping;
    switch (time.kind) {
      case "elapsed": {
        const elapsed = readElapsed(cells[time.column] ?? "", time.unit, this.mapping.decimal);
        return elapsed === null ? null : this.startMs + elapsed;
      }
      case "time-of-day": {
        const found = readTime(cells[time.column] ?? "");
        return found ? this.turn(found.ms) : null;
      }
      case "date-time": {
        const text = cells[time.column] ?? "";
        const date = readDate(text, dateOrder);
        const found = date && readTime(date.rest === "" ? "00:00" : date.rest);
        if (!date || !found) return null;
        this.noteOrder(text, line);
        return this.withZone(date.dayMs + found.ms, found.aheadMs, line);
      }
      case "date-and-time": {
        const text = cells[time.dateColumn] ?? "";
        const date = readDate(text, dateOrder);
        // A workbook shows the day zero before a time of day, and a time after a day.
        const clock = cells[time.timeColumn] ?? "";
        const found = readTime(readDate(clock, "ymd")?.rest ?? clock);
        if (!date || !found) return null;
        this.noteOrder(text, line);
        return this.withZone(date.dayMs + found.ms, found.aheadMs, line);
      }
    }
  }

  private noteOrder(text: string, line: number): void {
    if (this.isDateCertain) return;
    const found = /^(\d{1,4})([-./])(\d{1,2})[-./]/.exec(text);
    if (found)
      this.judgeOrder(
        Number(found[1]),
        Number(found[3]),
        found[1]!.length,
        found[2] === ".",
        text,
        line,
      );
    else this.isDateCertain = true;
  }

  private judgeOrder(
    first: number,
    second: number,
    firstLength: number,
    isDotted: boolean,
    text: string,
    line: number,
  ): void {
    // Dots are written between day and month in that order; four digits, or a number over twelve, leave no doubt.
    if (isDotted || firstLength > 2 || first > 12 || second > 12 || first === second)
      this.isDateCertain = true;
    else this.ambiguousDate ??= { line, text };
  }

  private withZone(wallMs: number, aheadMs: number | null, line: number): number {
    const { series } = this;
    if (series.count === 0) series.isAbsolute = aheadMs !== null;
    else if (series.isAbsolute !== (aheadMs !== null))
      this.issues.add("refused", "zone-in-some-lines", line);
    return wallMs - (aheadMs ?? 0);
  }

  /** A clock without a date passes midnight when it falls by more than half a day. */
  private turn(timeOfDayMs: number): number {
    if (this.lastTimeOfDay >= 0 && timeOfDayMs < this.lastTimeOfDay - DAY_MS / 2)
      this.turnedDays += 1;
    this.lastTimeOfDay = timeOfDayMs;
    return this.dayMs + this.turnedDays * DAY_MS + timeOfDayMs;
  }

  /** Reads a line from its bytes; false, with nothing kept, where it holds more than digits and their usual marks. */
  private readPlain(bytes: Uint8Array, from: number, line: number): boolean {
    const { kinds, delimiterByte, lastColumn } = this;
    let at = from;
    let hasTime = false;
    let wallMs = 0;
    for (let column = 0; column <= lastColumn; column++) {
      const kind = kinds[column]!;
      if (kind === SKIPPED) {
        let byte = bytes[at]!;
        while (byte !== delimiterByte && byte !== LF) {
          if (byte === QUOTE) return false;
          byte = bytes[++at]!;
        }
      } else if (kind >= LEVEL) {
        at = this.readPlainLevel(bytes, at, kind - LEVEL);
        if (at < 0) return false;
      } else {
        at = this.readPlainTime(bytes, at, kind, line);
        if (at < 0) return false;
        wallMs += this.timeMs;
        hasTime = true;
      }
      if (column === lastColumn) break;
      if (bytes[at] !== delimiterByte) return false;
      at += 1;
    }
    if (!hasTime || this.unread !== null || (this.series.isAbsolute && this.series.count > 0))
      return false;
    let byte = bytes[at]!;
    while (byte !== LF) {
      if (byte === QUOTE) return false;
      byte = bytes[++at]!;
    }
    this.at = at + 1;
    for (let index = 0; index < this.row.length; index++) {
      const hundredths = this.row[index]!;
      if (hundredths < this.lowest[index]!) this.lowest[index] = hundredths;
      if (hundredths > this.highest[index]!) this.highest[index] = hundredths;
    }
    if (this.mapping.time.kind === "elapsed") wallMs += this.startMs;
    else if (this.mapping.time.kind === "time-of-day") wallMs = this.turn(wallMs);
    this.keep(wallMs, line);
    return true;
  }

  /** Leaves the level in `row` and says where its cell ends; negative where it is no plain number that is believed. */
  private readPlainLevel(bytes: Uint8Array, from: number, index: number): number {
    let at = from;
    let byte = bytes[at]!;
    while (byte === SPACE) byte = bytes[++at]!;
    const isNegative = byte === 45;
    if (isNegative) byte = bytes[++at]!;
    let whole = 0;
    const begin = at;
    while (byte >= ZERO && byte <= NINE) {
      whole = whole * 10 + byte - ZERO;
      byte = bytes[++at]!;
    }
    if (at === begin || at - begin > 6) return -1;
    let hundredths = whole * 100;
    if (byte === this.decimalByte) {
      byte = bytes[++at]!;
      let scale = 10;
      while (byte >= ZERO && byte <= NINE) {
        const digit = byte - ZERO;
        if (scale >= 1) hundredths += digit * scale;
        else if (scale === 0.1 && digit >= 5) hundredths += 1;
        if (scale < 1 && digit !== 0) this.marks[index]!.rounded += 1;
        scale = scale === 10 ? 1 : scale === 1 ? 0.1 : 0.01;
        byte = bytes[++at]!;
      }
    }
    while (byte === SPACE) byte = bytes[++at]!;
    if (byte !== this.delimiterByte && byte !== LF && byte !== CR) return -1;
    if (isNegative) hundredths = -hundredths;
    if (this.mapping.levels[index]!.unit === "dB/10") hundredths = Math.round(hundredths / 10);
    if (hundredths > HIGHEST || hundredths < LOWEST) return -1;
    this.row[index] = hundredths;
    return at;
  }

  /** Leaves the time in `timeMs` and says where its cell ends; negative where it is not written in digits alone. */
  private readPlainTime(bytes: Uint8Array, from: number, kind: number, line: number): number {
    const { places, lengths, delimiterByte } = this;
    if (kind === DATE_TIME && this.prefixLength > 0) {
      const end = this.readSameDay(bytes, from);
      if (end > 0) return end;
    }
    let clockAt = 0;
    let at = from;
    let count = 0;
    let value = 0;
    let digits = 0;
    let firstMark = 0;
    for (;;) {
      const byte = bytes[at]!;
      if (byte >= ZERO && byte <= NINE) {
        if (digits === 0 && count === 3) clockAt = at;
        value = value * 10 + byte - ZERO;
        digits += 1;
        at += 1;
        continue;
      }
      if (digits > 0) {
        if (count === 7) return -1;
        places[count] = value;
        lengths[count] = digits;
        count += 1;
        value = 0;
        digits = 0;
      }
      if (byte === delimiterByte || byte === LF || byte === CR) break;
      // - . / : space, T and a comma within the seconds
      if (
        byte !== 45 &&
        byte !== 46 &&
        byte !== 47 &&
        byte !== 58 &&
        byte !== SPACE &&
        byte !== 84 &&
        byte !== 44
      )
        return -1;
      if (firstMark === 0) firstMark = byte;
      at += 1;
    }
    const clockFrom = kind === DATE_TIME || kind === DATE ? 3 : 0;
    let ms = 0;
    if (clockFrom === 3) {
      if (count < 3 || (kind === DATE && count !== 3) || lengths[0]! > 4 || lengths[2]! > 4)
        return -1;
      const [a, b, c] = [places[0]!, places[1]!, places[2]!];
      const order: DateOrder = lengths[0] === 4 ? "ymd" : this.mapping.dateOrder;
      const key = (a * 4096 + b) * 4096 + c;
      if (key !== this.dayKey) {
        const year = order === "ymd" ? a : c;
        const month = order === "mdy" ? a : b;
        const day = order === "ymd" ? c : order === "dmy" ? a : b;
        const dayMs = dayMsOf(year < 100 ? 2000 + year : year, month, day);
        if (dayMs === null) return -1;
        this.dayKey = key;
        this.dayMs = dayMs;
        if (!this.isDateCertain)
          this.judgeOrder(
            a,
            b,
            lengths[0]!,
            firstMark === 46,
            [a, b, c]
              .map((part, index) => String(part).padStart(lengths[index]!, "0"))
              .join(String.fromCharCode(firstMark)),
            line,
          );
      }
      ms = this.dayMs;
      if (kind === DATE) {
        this.timeMs = ms;
        return at;
      }
    }
    const parts = count - clockFrom;
    if (parts < 2 || parts > 4 || lengths[clockFrom]! > 2) return -1;
    const hour = places[clockFrom]!;
    const minute = places[clockFrom + 1]!;
    const second = parts > 2 ? places[clockFrom + 2]! : 0;
    if ((kind !== ELAPSED && hour > 23) || minute > 59 || second > 59) return -1;
    ms += ((hour * 60 + minute) * 60 + second) * 1000;
    if (parts === 4) {
      const length = lengths[clockFrom + 3]!;
      if (length > 6) return -1;
      ms += (places[clockFrom + 3]! * 1000) / 10 ** length;
    }
    this.timeMs = ms;
    this.prefixLength =
      kind === DATE_TIME && clockAt - from <= this.datePrefix.length ? clockAt - from : 0;
    if (this.prefixLength > 0) {
      this.datePrefix.set(bytes.subarray(from, clockAt));
      this.prefixMs = this.dayMs;
    }
    return at;
  }

  /** The commonest of all times: the date of the line before, and a clock as 06:00:00. */
  private readSameDay(bytes: Uint8Array, from: number): number {
    const { datePrefix, prefixLength } = this;
    for (let index = prefixLength - 1; index >= 0; index--)
      if (bytes[from + index] !== datePrefix[index]) return -1;
    const at = from + prefixLength;
    const h1 = bytes[at]! - ZERO;
    const h2 = bytes[at + 1]! - ZERO;
    const m1 = bytes[at + 3]! - ZERO;
    const m2 = bytes[at + 4]! - ZERO;
    const s1 = bytes[at + 6]! - ZERO;
    const s2 = bytes[at + 7]! - ZERO;
    const hour = h1 * 10 + h2;
    const isClock = h1 <= 2 && h2 <= 9 && m1 <= 5 && m2 <= 9 && s1 <= 5 && s2 <= 9 && hour <= 23;
    if (!isClock || (h1 | h2 | m1 | m2 | s1 | s2) < 0) return -1;
    if (bytes[at + 2] !== COLON || bytes[at + 5] !== COLON) return -1;
    const end = bytes[at + 8]!;
    if (end !== this.delimiterByte && end !== LF && end !== CR) return -1;
    const minute = m1 * 10 + m2;
    const second = s1 * 10 + s2;
    this.timeMs = this.prefixMs + ((hour * 60 + minute) * 60 + second) * 1000;
    return at + 8;
  }
}

const decimalsIn = (cell: string): number => /[.,](\d*)$/.exec(cell)?.[1]?.length ?? -1;

/** A local date and time as the mapping states it, as if the clock were UTC's. */
export function startOf(text: string | null): number | null {
  if (text === null) return null;
  const date = readDate(text.trim(), "ymd");
  const time = date && readTime(date.rest === "" ? "00:00" : date.rest);
  return date && time ? date.dayMs + time.ms : null;
}
