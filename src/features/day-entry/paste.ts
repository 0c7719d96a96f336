import type { Locale } from "../../../shared/i18n/index";
import { editText, parseCell, type UnaccountedWords } from "./cells";
import type { GridColumn } from "./columns";
import type { CellChange, RowDraft } from "./draft";

export interface Range {
  readonly fromRow: number;
  readonly toRow: number;
  readonly fromColumn: number;
  readonly toColumn: number;
}

export interface Place {
  readonly row: number;
  readonly column: number;
}

export const rangeOf = (a: Place, b: Place): Range => ({
  fromRow: Math.min(a.row, b.row),
  toRow: Math.max(a.row, b.row),
  fromColumn: Math.min(a.column, b.column),
  toColumn: Math.max(a.column, b.column),
});

/** Rows and cells of a block as a spreadsheet puts it on the clipboard: tabs, lines, quoted cells with either in them. */
export function parseBlock(text: string): string[][] {
  const rows: string[][] = [];
  let row: string[] = [];
  let cell = "";
  let isQuoted = false;
  for (let at = 0; at < text.length; at += 1) {
    const sign = text[at] as string;
    if (isQuoted) {
      if (sign !== '"') cell += sign;
      else if (text[at + 1] === '"') {
        cell += '"';
        at += 1;
      } else isQuoted = false;
    } else if (sign === '"' && cell === "") isQuoted = true;
    else if (sign === "\t") {
      row.push(cell);
      cell = "";
    } else if (sign === "\n" || sign === "\r") {
      if (sign === "\r" && text[at + 1] === "\n") at += 1;
      rows.push([...row, cell]);
      row = [];
      cell = "";
    } else cell += sign;
  }
  if (cell !== "" || row.length > 0) rows.push([...row, cell]);
  return rows;
}

export function writeBlock(rows: readonly (readonly string[])[]): string {
  const quote = (cell: string) =>
    /["\t\n\r]/.test(cell) ? `"${cell.replaceAll('"', '""')}"` : cell;
  return rows.map((row) => row.map(quote).join("\t")).join("\n");
}

export const isBlock = (text: string): boolean => /[\t\n\r]/.test(text.replace(/\r?\n$/, ""));

/** A range of the grid as text; `workedOut` says what stands in a cell that nobody types. */
export function copyRange(
  range: Range,
  rows: readonly RowDraft[],
  columns: readonly GridColumn[],
  workedOut: (row: RowDraft, column: GridColumn) => string,
  locale: Locale,
  words: UnaccountedWords,
): string {
  return writeBlock(
    rows
      .slice(range.fromRow, range.toRow + 1)
      .map((row) =>
        columns
          .slice(range.fromColumn, range.toColumn + 1)
          .map((column) =>
            column.cell ? editText(row.cells[column.cell], locale, words) : workedOut(row, column),
          ),
      ),
  );
}

export interface Pasted {
  readonly changes: readonly CellChange[];
  readonly range: Range;
  /** What did not fit or has no cell to go to. */
  readonly leftOut: { readonly rows: number; readonly columns: number; readonly absent: number };
}

/**
 * A block put down with its corner at a place. A single value fills the whole selection. Columns that are worked out
 * are passed over, so that what was copied here goes back to where it came from.
 */
export function pasteBlock(
  block: readonly (readonly string[])[],
  selection: Range,
  rows: readonly RowDraft[],
  columns: readonly GridColumn[],
  locale: Locale,
  words: UnaccountedWords,
): Pasted {
  const width = Math.max(0, ...block.map((line) => line.length));
  const [only] = block;
  const isSingle = block.length === 1 && width === 1;
  const height = isSingle ? selection.toRow - selection.fromRow + 1 : block.length;
  const breadth = isSingle ? selection.toColumn - selection.fromColumn + 1 : width;
  // The result at the far right is no place for a value: whatever reaches it does not fit.
  const lastColumn = columns.findLastIndex(({ cell }) => cell !== null);
  const changes: CellChange[] = [];
  let absent = 0;
  for (let down = 0; down < height; down += 1) {
    const row = rows[selection.fromRow + down];
    if (!row) break;
    if (row.isAbsent) {
      absent += 1;
      continue;
    }
    for (let right = 0; right < breadth; right += 1) {
      const cell = columns[selection.fromColumn + right]?.cell;
      const text = isSingle ? only?.[0] : block[down]?.[right];
      if (!cell || text === undefined) continue;
      changes.push({ workerId: row.workerId, cell, value: parseCell(cell, text, locale, words) });
    }
  }
  const toRow = Math.min(rows.length - 1, selection.fromRow + height - 1);
  const toColumn = Math.min(lastColumn, selection.fromColumn + breadth - 1);
  return {
    changes,
    range: { ...selection, toRow, toColumn: Math.max(selection.fromColumn, toColumn) },
    leftOut: {
      rows: Math.max(0, selection.fromRow + height - rows.length),
      columns: Math.max(0, selection.fromColumn + breadth - 1 - lastColumn),
      absent,
    },
  };
}

/** The top row of a selection put into the rows below it; of a single row, the row above put into it. */
export function fillDown(
  selection: Range,
  rows: readonly RowDraft[],
  columns: readonly GridColumn[],
): CellChange[] {
  const isSingle = selection.fromRow === selection.toRow;
  const source = rows[isSingle ? selection.fromRow - 1 : selection.fromRow];
  if (!source) return [];
  const targets = isSingle
    ? rows.slice(selection.fromRow, selection.fromRow + 1)
    : rows.slice(selection.fromRow + 1, selection.toRow + 1);
  return targets
    .filter(({ isAbsent }) => !isAbsent)
    .flatMap(({ workerId }) =>
      columns.slice(selection.fromColumn, selection.toColumn + 1).flatMap(({ cell }) => {
        // A reading is one worker's own and is never filled in from another's.
        if (!cell || cell === "reading") return [];
        const from = source.cells[cell];
        const value = { value: null, text: null, fault: null, ...from, mark: "typed" as const };
        return [{ workerId, cell, value }];
      }),
    );
}
