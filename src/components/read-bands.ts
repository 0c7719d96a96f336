import { OCTAVE_BANDS_HZ } from "../../shared/acoustics/types";
import { decimalMark, parseNumber } from "../../shared/format/number";
import type { Locale } from "../../shared/i18n/index";
import { Unreadable } from "./form";
import type { Typed } from "./number-input";

/** Nominal third-octaves, three to an octave: the middle one of each is the octave's own. */
const THIRDS_HZ = [
  25, 31.5, 40, 50, 63, 80, 100, 125, 160, 200, 250, 315, 400, 500, 630, 800, 1000, 1250, 1600,
  2000, 2500, 3150, 4000, 5000, 6300, 8000, 10_000, 12_500, 16_000, 20_000,
];
const isOctave = (hz: number): boolean => THIRDS_HZ.indexOf(hz) % 3 === 1;
/** No level, attenuation or deviation reaches it, so that a number of this size among frequencies is one. */
const SURELY_HZ = 200;

/**
 * What becomes of third-octaves. Levels are summed by energy. A test of attenuation sounds one third-octave band at each
 * octave's frequency (ISO 4869-1; the US test adds 3150 and 6300 Hz), so that a certificate's value there is the one
 * asked for: it is taken, and none is summed. What else is taken off depends on the noise within the octave: refused.
 */
export type ThirdOctaves = "sum" | "centre" | "refuse";

export interface BandsRead {
  /** Band, from 0, at which the values begin. */
  readonly from: number;
  readonly values: readonly Typed[];
  /** Frequencies that were there and are not among those asked for. */
  readonly leftOutHz: readonly number[];
  /** Octaves summed from their third-octaves. */
  readonly summedHz: readonly number[];
}

export type BandsRefusal =
  | { readonly code: "too-many"; readonly count: number; readonly places: number }
  | { readonly code: "block" | "open-end" | "commas" | "no-values" | "repeated" }
  | { readonly code: "uneven"; readonly count: number; readonly places: number }
  | { readonly code: "no-band" | "no-whole-octave" | "not-summed" };

type BandsPasted =
  | { readonly read: BandsRead; readonly refusal: null }
  | { readonly read: null; readonly refusal: BandsRefusal };

const refused = (refusal: BandsRefusal): BandsPasted => ({ read: null, refusal });
const plain = (from: number, values: readonly Typed[]): BandsPasted => ({
  read: { from, values, leftOutHz: [], summedHz: [] },
  refusal: null,
});

/** "63", "63 Hz", "1k", "1 kHz", "31,5": the nominal frequency that a cell names, or null. */
function frequencyOf(cell: string): number | null {
  const match = /^(\d+(?:[.,]\d+)?)\s*(k)?(?:hz)?$/i.exec(cell);
  if (!match) return null;
  const hz = Number(match[1]!.replace(",", ".")) * (match[2] ? 1000 : 1);
  return THIRDS_HZ.includes(hz) ? hz : null;
}

/** Whether a cell names a frequency of an octave or third-octave. */
export const isFrequency = (cell: string): boolean => frequencyOf(cell) !== null;

/** A number as typed, nothing, or what stays as it is because it can't be read. */
export function readCell(cell: string, locale: Locale): Typed {
  const parsed = parseNumber(cell, locale);
  if (parsed.kind === "ok") return parsed.value;
  if (parsed.kind === "empty") return null;
  return new Unreadable(parsed.kind === "ambiguous" ? "ambiguous" : "not-a-number", cell);
}

/** A line without anything in its cells. */
export const isBlank = (cells: readonly string[]): boolean => cells.every((cell) => cell === "");

/** Frequencies and nothing else, but for a name before them. */
function isHead(cells: readonly string[]): boolean {
  const [first = "", ...others] = cells.filter((cell) => cell !== "");
  const named = isFrequency(first) ? [first, ...others] : others;
  return named.length > 1 && named.every(isFrequency) && named.some(isSurelyHz);
}

const isSurelyHz = (cell: string): boolean =>
  (frequencyOf(cell) ?? 0) >= SURELY_HZ || (isFrequency(cell) && /[a-z]/i.test(cell));

/**
 * What a spreadsheet, a report or a file has in cells, line by line, empty ones in their places: by tabs or semicolons
 * where there are any, by commas where those are no decimal marks, else by blanks. One line end after the last line ends
 * it and begins no other.
 */
export function cellsOf(text: string, locale: Locale): string[][] {
  const lines = text
    .replace(/(\d)[ \u00a0]+(k?hz)\b/gi, "$1$2")
    .replace(/(\r\n|\r|\n)$/, "")
    .split(/\r\n|\r|\n/);
  const separator = separatorOf(lines, locale);
  return lines.map((line) =>
    (separator === BLANKS ? line.trim() : line).split(separator).map((cell) => cell.trim()),
  );
}

const BLANKS = /[ \u00a0]+/;

function separatorOf(lines: readonly string[], locale: Locale): RegExp {
  if (lines.some((line) => /[\t;]/.test(line))) return /[\t;]/;
  // A decimal comma has a digit at once on both sides.
  const comma = decimalMark(locale) === "," ? /,[ \u00a0]+/ : /,/;
  const split = lines.map((line) => line.split(comma).map((cell) => cell.trim()));
  const isSplit =
    split.some(({ length }) => length > (decimalMark(locale) === "," ? 1 : 2)) ||
    isHead(split.flatMap(([first = "", ...rest]) => (rest.length === 1 ? [first] : [])));
  const holdsBlanks = split.flat().some((cell) => BLANKS.test(cell));
  return isSplit && !holdsBlanks ? comma : BLANKS;
}

/**
 * Values by band from a spreadsheet, a report or a file: a row or a column with a cell for each of the bands, empty ones
 * in their places; of octaves also seven, from 125 Hz on; fewer go on from the band at which they were pasted; a table
 * with frequencies says itself which is which. What can't be told apart is refused, never guessed. Null: no more than
 * one value, which is a cell's own.
 */
export function readBands(
  text: string,
  locale: Locale,
  {
    at = 0,
    bandsHz = OCTAVE_BANDS_HZ,
    thirds,
  }: { at?: number; bandsHz?: readonly number[]; thirds: ThirdOctaves },
): BandsPasted | null {
  const rows = cellsOf(text, locale);
  const filled = rows.filter((cells) => !isBlank(cells));
  if (filled.flat().length < 2 && rows.length < 2)
    return /\d,\d+,/.test(text) ? refused({ code: "commas" }) : null;
  const table = tableOf(filled, locale);
  if (table?.refusal) return refused(table.refusal);
  if (table) return fromFrequencies(table.found, bandsHz, thirds);
  if (filled.length === 0) return null;
  return fromCells(rows, filled, locale, { at, bandsHz, endsOpen: /[^\r]\n$/.test(text) });
}

/** The one row or column without frequencies. */
function fromCells(
  rows: readonly string[][],
  filled: readonly string[][],
  locale: Locale,
  { at, bandsHz, endsOpen }: { at: number; bandsHz: readonly number[]; endsOpen: boolean },
): BandsPasted | null {
  const isColumn = rows.every(({ length }) => length === 1);
  if (!isColumn && filled.length > 1) return refused({ code: "block" });
  const cells = isColumn ? rows.map(([cell = ""]) => cell) : [...filled[0]!];
  const count = bandsHz.length;
  const isOctaves = bandsHz === OCTAVE_BANDS_HZ;
  // Nothing stands beyond the last band: a line's last separator may end its last cell.
  while (cells.length > count && cells.at(-1) === "") cells.pop();
  // A column's last line end may end its seventh value, or begin an eighth that is empty.
  if (isColumn && isOctaves && endsOpen && cells.length === count - 1)
    return refused({ code: "open-end" });
  const isWhole = cells.length === count || (isOctaves && cells.length === count - 1);
  if (!isWhole && cells.filter((cell) => cell !== "").length < 2) return null;
  const from = isWhole ? count - cells.length : at;
  if (cells.length > count - from)
    return refused({ code: "too-many", count: cells.length, places: count - from });
  return plain(
    from,
    cells.map((cell) => readCell(cell, locale)),
  );
}

type Table =
  | { readonly found: ReadonlyMap<number, Typed>; readonly refusal: null }
  | { readonly found: null; readonly refusal: BandsRefusal };

const noTable = (refusal: BandsRefusal): Table => ({ found: null, refusal });

/** A table whose first column or one row names frequencies, by frequency; null: none is named. */
function tableOf(lines: readonly string[][], locale: Locale): Table | null {
  const under = lines.filter(([label = ""]) => isFrequency(label));
  const isColumn =
    under.length > 1 &&
    under.length >= lines.length - 1 &&
    under.some((line) => line.length > 1) &&
    // A level may be a nominal frequency too: of two lines the first may be "63 Hz, 80".
    (under.length > 2 || !isHead(lines[0]!) || under.every(([label = ""]) => isSurelyHz(label))) &&
    isHead(under.map(([label = ""]) => label));
  if (isColumn) {
    // The first column that holds anything, the same for all: an empty cell is not filled from beside it.
    const column = Math.min(
      ...under.flatMap((line) => line.flatMap((cell, at) => (at > 0 && cell !== "" ? [at] : []))),
    );
    if (!Number.isFinite(column)) return noTable({ code: "no-values" });
    return byFrequency(
      under.map((line) => [line[0]!, line[column] ?? ""]),
      locale,
    );
  }
  const at = lines.findIndex(isHead);
  if (at < 0) return null;
  const head = lines[at]!;
  const next = lines[at + 1];
  if (!next) return noTable({ code: "no-values" });
  const row = [...next];
  while (row.length > head.length && row.at(-1) === "") row.pop();
  // The row of values may have a name before it where the row of frequencies has none.
  const shift = row.length - head.length;
  const isNamed = shift === 1 && readCell(row[0]!, locale) instanceof Unreadable;
  if (shift !== 0 && !isNamed)
    return noTable({ code: "uneven", count: row.length, places: head.length });
  return byFrequency(
    head.flatMap((cell, place) => (isFrequency(cell) ? [[cell, row[place + shift] ?? ""]] : [])),
    locale,
  );
}

function byFrequency(cells: readonly (readonly string[])[], locale: Locale): Table {
  const found = new Map(
    cells.map(([head = "", cell = ""]) => [frequencyOf(head)!, readCell(cell, locale)] as const),
  );
  return found.size < cells.length ? noTable({ code: "repeated" }) : { found, refusal: null };
}

function fromFrequencies(
  found: ReadonlyMap<number, Typed>,
  bandsHz: readonly number[],
  thirds: ThirdOctaves,
): BandsPasted {
  const namedHz = [...found.keys()];
  const areThirds = !namedHz.every((hz) => isOctave(hz) || bandsHz.includes(hz));
  if (areThirds && thirds === "refuse") return refused({ code: "not-summed" });
  if (!namedHz.some((hz) => bandsHz.includes(hz))) return refused({ code: "no-band" });
  if (areThirds && thirds === "sum") return summed(found, bandsHz);
  return {
    read: {
      from: 0,
      values: bandsHz.map((hz) => found.get(hz) ?? null),
      leftOutHz: namedHz.filter((hz) => !bandsHz.includes(hz)),
      summedHz: [],
    },
    refusal: null,
  };
}

/** Levels of third-octaves by energy, where all three of an octave are there. */
function summed(found: ReadonlyMap<number, Typed>, bandsHz: readonly number[]): BandsPasted {
  const whole = new Map<number, number>();
  const taken = new Set<number>();
  for (const hz of bandsHz) {
    const middle = THIRDS_HZ.indexOf(hz);
    const threeHz = THIRDS_HZ.slice(middle - 1, middle + 2);
    const three = threeHz.map((third) => found.get(third));
    if (!three.every((level): level is number => typeof level === "number")) continue;
    whole.set(hz, 10 * Math.log10(three.reduce((sum, level) => sum + 10 ** (level / 10), 0)));
    for (const third of threeHz) taken.add(third);
  }
  if (whole.size === 0) return refused({ code: "no-whole-octave" });
  return {
    read: {
      from: 0,
      values: bandsHz.map((hz) => whole.get(hz) ?? null),
      leftOutHz: [...found.keys()].filter((hz) => !taken.has(hz)),
      summedHz: [...whole.keys()],
    },
    refusal: null,
  };
}
