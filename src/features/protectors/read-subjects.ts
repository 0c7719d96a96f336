import { OCTAVE_BANDS_HZ } from "../../../shared/acoustics/types";
import type { Locale } from "../../../shared/i18n/index";
import { Unreadable } from "../../components/form";
import type { Typed } from "../../components/number-input";
import { cellsOf, isBlank, isFrequency, readCell } from "../../components/read-bands";

const COUNT = OCTAVE_BANDS_HZ.length;

/**
 * Attenuation of single test subjects, one a line: eight bands, or seven from 125 Hz on. A head of frequencies is left
 * out, and so is a first column of names or numbers. What is missing stays empty, what is too much can't be read:
 * neither is dropped without a word. Where some lines have eight values and some seven, the fewer of them can't be read:
 * of eight with one left out the others would stand a band too high.
 */
export function readSubjects(text: string, locale: Locale): Typed[][] {
  const rows = cellsOf(text, locale).filter((cells) => !isBlank(cells) && !isHead(cells));
  const hasNames = rows.length > 0 && namesSubjects(rows, locale);
  const subjects = rows.map((row) => (hasNames ? row.slice(1) : row));
  const others = withOther63Hz(subjects);
  return subjects.map((cells) => {
    const from = cells.length === COUNT - 1 ? 1 : 0;
    const values = cells.slice(0, COUNT - from).map((cell) => readCell(cell, locale));
    const beyond = cells
      .slice(COUNT - from)
      .filter(Boolean)
      .join(" ");
    if (beyond !== "") values[values.length - 1] = new Unreadable("too-many-bands", beyond);
    const bands = OCTAVE_BANDS_HZ.map((_, band) => values[band - from] ?? null);
    if (others.has(cells)) bands[0] = new Unreadable(OTHER_63_HZ, from === 0 ? cells[0]! : "");
    return bands;
  });
}

/** A line that differs from most in having a value at 63 Hz. */
export const OTHER_63_HZ = "other-63-hz";

function withOther63Hz(subjects: readonly string[][]): ReadonlySet<string[]> {
  const left = subjects.filter(({ length }) => length === COUNT - 1);
  const stated = subjects.filter(({ length }) => length === COUNT);
  return new Set(left.length > stated.length ? stated : stated.length > 0 ? left : []);
}

/** On which line of the text each subject stands, from 1. */
export function linesOfSubjects(text: string, locale: Locale): number[] {
  return cellsOf(text, locale).flatMap((cells, at) =>
    isBlank(cells) || isHead(cells) ? [] : [at + 1],
  );
}

const isHead = (cells: readonly string[]): boolean =>
  cells.filter(isFrequency).length >= COUNT - 1 && cells.some(namesHighest);

/** A first column beyond the bands, of words, or counting from 1. */
const namesSubjects = (rows: readonly string[][], locale: Locale): boolean =>
  rows.every(({ length }) => length === COUNT + 1) ||
  rows.every(([first = ""]) => readCell(first, locale) instanceof Unreadable) ||
  (rows.length > 1 && rows.every(([first], index) => first === String(index + 1)));

const namesHighest = (cell: string): boolean => /^8\s*(000|k)/i.test(cell);
