import type { GridColumn } from "./columns";
import type { Place } from "./paste";

export interface GridShape {
  readonly rowCount: number;
  readonly columns: readonly GridColumn[];
}

const clamp = (value: number, most: number) => Math.max(0, Math.min(most, value));

/** Where an arrow, Home or End leads. Null: not such a key. */
export function placeAfterKey(
  key: string,
  isWithControl: boolean,
  { row, column }: Place,
  { rowCount, columns }: GridShape,
  pageRows: number,
): Place | null {
  const lastRow = rowCount - 1;
  const lastColumn = columns.length - 1;
  switch (key) {
    case "ArrowDown":
      return { row: isWithControl ? lastRow : clamp(row + 1, lastRow), column };
    case "ArrowUp":
      return { row: isWithControl ? 0 : clamp(row - 1, lastRow), column };
    case "ArrowRight":
      return { row, column: isWithControl ? lastColumn : clamp(column + 1, lastColumn) };
    case "ArrowLeft":
      return { row, column: isWithControl ? 0 : clamp(column - 1, lastColumn) };
    case "Home":
      return { row: isWithControl ? 0 : row, column: 0 };
    case "End":
      return { row: isWithControl ? lastRow : row, column: lastColumn };
    case "PageDown":
      return { row: clamp(row + pageRows, lastRow), column };
    case "PageUp":
      return { row: clamp(row - pageRows, lastRow), column };
    default:
      return null;
  }
}

/** The next cell to type in, over the end of the row into the next; null past the last: then Tab leaves the grid. */
export function placeAfterTab(
  isBack: boolean,
  { row, column }: Place,
  { rowCount, columns }: GridShape,
): Place | null {
  const step = isBack ? -1 : 1;
  for (let at = column + step; at >= 0 && at < columns.length; at += step) {
    if (columns[at]?.cell) return { row, column: at };
  }
  const next = row + step;
  if (next < 0 || next >= rowCount) return null;
  const typed = columns.flatMap(({ cell }, at) => (cell ? [at] : []));
  const at = isBack ? typed.at(-1) : typed[0];
  return at === undefined ? null : { row: next, column: at };
}

interface Key {
  readonly key: string;
  readonly ctrlKey: boolean;
  readonly metaKey: boolean;
  readonly altKey: boolean;
  readonly shiftKey: boolean;
}

/** A letter's key without any other, whether or not the keyboard is locked to capitals. */
export const isAlone = (event: Key, letter: string): boolean =>
  event.key.toLowerCase() === letter &&
  !event.ctrlKey &&
  !event.metaKey &&
  !event.altKey &&
  !event.shiftKey;

/** A key that types a sign, and so begins to write in the cell. */
export const isTyping = (event: Omit<Key, "shiftKey">): boolean =>
  [...event.key].length === 1 &&
  event.key !== " " &&
  !event.ctrlKey &&
  !event.metaKey &&
  !event.altKey;
