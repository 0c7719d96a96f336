import { OCTAVE_BANDS_HZ } from "../../shared/acoustics/types";
import { parseNumber } from "../../shared/format/number";
import type { Locale } from "../../shared/i18n/index";
import { Unreadable } from "./form";
import type { Typed } from "./number-input";

const COUNT = OCTAVE_BANDS_HZ.length;
/** Nominal third-octaves, three to an octave: the middle one of each is the octave's own. */
const THIRDS_HZ = [
  25, 31.5, 40, 50, 63, 80, 100, 125, 160, 200, 250, 315, 400, 500, 630, 800, 1000, 1250, 1600,
  2000, 2500, 3150, 4000, 5000, 6300, 8000, 10_000, 12_500, 16_000, 20_000,
];

/** "63", "63 Hz", "1k", "1 kHz", "31,5": the nominal frequency that a cell names, or null. */
function frequencyOf(cell: string): number | null {
  const match = /^(\d+(?:[.,]\d+)?)\s*(k)?(?:hz)?$/i.exec(cell);
  if (!match) return null;
  const hz = Number(match[1]!.replace(",", ".")) * (match[2] ? 1000 : 1);
  return THIRDS_HZ.includes(hz) ? hz : null;
}

/** A number as typed, nothing, or what stays as it is because it can't be read. */
export function readCell(cell: string, locale: Locale): Typed {
  const parsed = parseNumber(cell, locale);
  if (parsed.kind === "ok") return parsed.value;
  if (parsed.kind === "empty") return null;
  return new Unreadable(parsed.kind === "ambiguous" ? "ambiguous" : "not-a-number", cell);
}

/** By frequency: octaves as they stand, third-octaves summed by energy where all three of an octave are there. */
function fromFrequencies(found: ReadonlyMap<number, Typed>): Typed[] {
  const hasThirds = [...found.keys()].some((hz) => THIRDS_HZ.indexOf(hz) % 3 !== 1);
  return OCTAVE_BANDS_HZ.map((hz) => {
    if (!hasThirds) return found.get(hz) ?? null;
    const middle = THIRDS_HZ.indexOf(hz);
    const thirds = THIRDS_HZ.slice(middle - 1, middle + 2).map((third) => found.get(third));
    return thirds.every((level): level is number => typeof level === "number")
      ? 10 * Math.log10(thirds.reduce((sum, level) => sum + 10 ** (level / 10), 0))
      : null;
  });
}

/** A table whose one row or column names frequencies; the next one holds the levels. */
function fromTable(lines: readonly string[][], locale: Locale): Typed[] | null {
  const columns = new Map<number, Typed>();
  for (const [label = "", ...cells] of lines) {
    const hz = frequencyOf(label);
    const level = cells.find((cell) => cell !== "");
    if (hz !== null && level !== undefined && lines.length > 1)
      columns.set(hz, readCell(level, locale));
  }
  if (OCTAVE_BANDS_HZ.slice(1).every((hz) => columns.has(hz))) return fromFrequencies(columns);
  for (const [index, line] of lines.entries()) {
    const places = line.map(frequencyOf);
    const next = lines[index + 1];
    if (!next || !OCTAVE_BANDS_HZ.slice(1).every((hz) => places.includes(hz))) continue;
    // The row of levels may have a name before it, or none where the row of frequencies has one.
    const shift = next.length - line.length;
    const named = places.flatMap((hz, place) =>
      hz === null ? [] : [[hz, readCell(next[place + shift] ?? "", locale)] as const],
    );
    return fromFrequencies(new Map(named));
  }
  return null;
}

export interface BandsRead {
  /** Band, from 0, at which the values begin. */
  readonly from: number;
  readonly values: readonly Typed[];
}

/**
 * Octave levels from a spreadsheet, a report or a file: a row or a column of eight, or of seven from 125 Hz on; fewer go
 * on from the band at which they were pasted; a table with frequencies says itself which is which. Null: no more than one
 * value, which is a cell's own.
 */
export function readBands(text: string, locale: Locale, at = 0): BandsRead | null {
  const rows = cellsOf(text);
  const table = fromTable(rows, locale);
  if (table) return { from: 0, values: table };
  return fromCells(rows, locale, COUNT, (count) => (count === COUNT - 1 ? 1 : at));
}

/** A row or a column of values at `count` test frequencies; fewer go on from where they were pasted. Null as above. */
export function readRow(text: string, locale: Locale, at: number, count: number): BandsRead | null {
  return fromCells(cellsOf(text), locale, count, () => at);
}

/** What a spreadsheet or a report has in cells, line by line: by tabs or semicolons where there are any, else by blanks. */
export function cellsOf(text: string): string[][] {
  const lines = text
    .replace(/(\d)[ \u00a0]+(k?hz)\b/gi, "$1$2")
    .split(/\r\n|\r|\n/)
    .map((line) => line.trim())
    .filter((line) => line !== "");
  const hasTabs = lines.some((line) => /[\t;]/.test(line));
  return lines.map((line) =>
    line.split(hasTabs ? /[\t;]/ : /[ \u00a0]+/).map((cell) => cell.trim()),
  );
}

function fromCells(
  rows: readonly string[][],
  locale: Locale,
  count: number,
  startOf: (cells: number) => number,
): BandsRead | null {
  const cells = rows.flat().filter((cell) => cell !== "");
  if (cells.length < 2) return null;
  const from = cells.length === count ? 0 : startOf(cells.length);
  return { from, values: cells.slice(0, count - from).map((cell) => readCell(cell, locale)) };
}

/** Whether a cell names a frequency of an octave or third-octave. */
export const isFrequency = (cell: string): boolean => frequencyOf(cell) !== null;
