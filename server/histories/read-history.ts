import { MISSING } from "../../shared/acoustics/history";
import { splitLine } from "../../shared/history-file/cells";
import type { HistoryMapping, HistoryReport } from "../../shared/schemas/history";
import { IssueList } from "./issue-list";
import { type Grid, layOnGrid } from "./lay-on-grid";
import { decoderOf, firstBytes, isWorkbook, readText, readWorkbook } from "./open-source";
import { type ChannelMarks, RowReader, startOf } from "./read-rows";
import { toInstants } from "./site-clock";
import { sniffEncoding, type TextEncoding } from "./text-encoding";
import { readSheet, WorkbookRefused } from "./workbook";

export interface HistoryToRead {
  file: string;
  mapping: HistoryMapping;
  /** IANA name of the site's zone. */
  timeZone: string;
  /** Codes of what was asked and is accepted. */
  answers: readonly string[];
}

export interface ReadHistory {
  report: HistoryReport;
  /** Null where the file is refused. */
  grid: Grid | null;
}

/** No worker's noise stays below this; sound pressures in pascals do. */
const NO_PASCALS_ABOVE_DB = 20;

/**
 * Reads a history's file by a mapping: on its grid, with all that was found wrong, asked or understood on the way.
 */
export async function readHistory(
  { file, mapping, timeZone, answers }: HistoryToRead,
  onProgress: (progressPct: number) => void,
): Promise<ReadHistory> {
  const issues = new IssueList();
  const { bytes } = await firstBytes(file, 64 * 1024);
  const isBook = isWorkbook(bytes);
  const encoding: TextEncoding = isBook ? "utf-8" : sniffEncoding(bytes);
  let lines = 0;
  let reader: RowReader;
  try {
    const heads = await headCells(file, mapping, isBook, encoding, bytes);
    reader = new RowReader(
      mapping,
      issues,
      decoderOf(encoding.startsWith("utf-16") ? "utf-8" : encoding),
      heads,
    );
    lines = isBook
      ? await readWorkbook(file, mapping, reader, onProgress)
      : await readText(file, encoding, mapping, reader, issues, onProgress);
  } catch (error) {
    if (!(error instanceof WorkbookRefused)) throw error;
    issues.add("refused", error.code, 1, error.params);
    return { report: reportOf(0, mapping, [], null, issues), grid: null };
  }
  reader.finish();
  const { series } = reader;
  if (series.count === 0 && issues.refusedCount === 0)
    issues.add("refused", "no-values", mapping.skipLines + 1);
  if (
    (mapping.time.kind === "elapsed" || mapping.time.kind === "time-of-day") &&
    startOf(mapping.startsAt) === null
  )
    issues.add("refused", "start-missing", 1);
  if (reader.ambiguousDate && !reader.isDateCertain)
    issues.add("asked", "date-ambiguous", reader.ambiguousDate.line, {
      text: reader.ambiguousDate.text,
      order: mapping.dateOrder,
    });
  addMarks(reader, mapping, issues);
  const isElapsed = mapping.time.kind === "elapsed";
  if (!series.isAbsolute && mapping.clock === "site" && series.count > 0) {
    // Time elapsed never follows a clock: only its beginning is a local time.
    if (isElapsed) shiftAll(series.times, series.count, timeZone, series.times[0]!);
    else toInstants(series, timeZone, issues, firstOrSecond(answers));
  }
  const grid = layOnGrid(series, issues);
  return {
    report: reportOf(lines, mapping, reader.marks, grid, issues),
    grid: issues.refusedCount === 0 ? grid : null,
  };
}

const firstOrSecond = (answers: readonly string[]) =>
  answers.includes("time-twice-second")
    ? "second"
    : answers.includes("time-twice")
      ? "first"
      : null;

function shiftAll(times: Float64Array, count: number, timeZone: string, firstMs: number): void {
  const probe = { times: Float64Array.of(firstMs), lines: Uint32Array.of(1), count: 1 };
  toInstants(probe, timeZone, new IssueList(), "first");
  const ahead = firstMs - probe.times[0]!;
  for (let index = 0; index < count; index++) times[index]! -= ahead;
}

async function headCells(
  file: string,
  mapping: HistoryMapping,
  isBook: boolean,
  encoding: TextEncoding,
  bytes: Buffer,
): Promise<string[]> {
  if (mapping.skipLines === 0) return [];
  if (isBook) {
    let heads: string[] = [];
    await readSheet(
      file,
      mapping.sheet,
      () => undefined,
      (cells, line) => {
        if (line === mapping.skipLines) heads = [...cells];
        return line < mapping.skipLines;
      },
    );
    return heads;
  }
  const decoder = new TextDecoder(encoding);
  const line =
    decoder.decode(bytes, { stream: true }).split(/\r\n|\n|\r/)[mapping.skipLines - 1] ?? "";
  return splitLine(line, mapping.delimiter);
}

function addMarks(reader: RowReader, mapping: HistoryMapping, issues: IssueList): void {
  reader.marks.forEach((marks, index) => {
    const column = reader.columnName(index);
    const { unit, channel } = mapping.levels[index]!;
    const { count } = reader.series;
    if (marks.missing > 0)
      issues.add("told", "value-missing", marks.firstMissingLine, { count: marks.missing }, column);
    if (marks.over > 0)
      issues.add("asked", "over-range", marks.firstOverLine, { count: marks.over }, column);
    if (marks.under > 0)
      issues.add("asked", "under-range", marks.firstUnderLine, { count: marks.under }, column);
    if (marks.rounded > 0) issues.add("told", "hundredths-kept", mapping.skipLines + 1, {}, column);
    if (count === 0) return;
    if (marks.missing + marks.over + marks.under === count) {
      issues.add("refused", "column-empty", mapping.skipLines + 1, {}, column);
      return;
    }
    if (marks.strange > 0) {
      const isMost = marks.strange > count / 2;
      const looksLike =
        unit === "dB" && isMost && marks.strangest > 200 ? "levels-in-tenths" : "level-impossible";
      issues.add(
        "refused",
        looksLike,
        marks.firstStrangeLine,
        { value: marks.strangest, count: marks.strange },
        column,
      );
    } else if (unit === "dB" && marks.highest > 0 && marks.highest < NO_PASCALS_ABOVE_DB)
      issues.add(
        "asked",
        "levels-in-pascals",
        mapping.skipLines + 1,
        { highest: marks.highest },
        column,
      );
    else if (unit === "dB/10")
      issues.add("asked", "unit-tenths", mapping.skipLines + 1, { highest: marks.highest }, column);
    else if (unit === "Pa")
      issues.add(
        "asked",
        "unit-pascals",
        mapping.skipLines + 1,
        { highest: marks.highest, channel },
        column,
      );
  });
}

function reportOf(
  lines: number,
  mapping: HistoryMapping,
  marks: readonly ChannelMarks[],
  grid: Grid | null,
  issues: IssueList,
): HistoryReport {
  const valuesCount = grid?.levels[0]?.length ?? 0;
  return {
    lines,
    valuesCount,
    intervalMs: grid?.intervalMs ?? null,
    startsAt: grid ? new Date(grid.startMs).toISOString() : null,
    endsAt: grid ? new Date(grid.startMs + valuesCount * grid.intervalMs).toISOString() : null,
    channels: marks.map((mark, index) => {
      const levels = grid?.levels[index] ?? new Int16Array(0);
      let missing = 0;
      let [lowest, highest] = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY];
      for (const level of levels) {
        if (level === MISSING) missing += 1;
        else {
          if (level < lowest) lowest = level;
          if (level > highest) highest = level;
        }
      }
      return {
        channel: mapping.levels[index]!.channel,
        missing,
        overRange: mark.over,
        underRange: mark.under,
        lowestDb: lowest === Number.POSITIVE_INFINITY ? null : lowest / 100,
        highestDb: highest === Number.NEGATIVE_INFINITY ? null : highest / 100,
      };
    }),
    issues: issues.listed,
    issuesCount: issues.count,
  };
}
