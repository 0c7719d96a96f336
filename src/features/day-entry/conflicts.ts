import type { DayGridView, GridRow, SavedShift } from "../../../shared/schemas/shift";
import type { Cell } from "./cells";
import { type CellId, taskCell, wornCell } from "./columns";
import { type DayDraft, isBehind, openRow, type RowDraft } from "./draft";

/** A field on which two savings of one shift differ. */
export interface Difference {
  readonly cell: CellId | "note";
  readonly yours: Cell | string | undefined;
  readonly saved: Cell | string | undefined;
}

const sameCell = (a: Cell | undefined, b: Cell | undefined) =>
  JSON.stringify(a?.value ?? null) === JSON.stringify(b?.value ?? null) && !a?.fault;

const isUnknown = (cell: Cell | undefined) => JSON.stringify(cell?.value ?? { how: "unknown" });

/** The saved shift as a row, beside which the draft's row can be laid. */
export const savedRow = (gridRow: GridRow, saved: SavedShift, view: DayGridView): RowDraft =>
  openRow({ ...gridRow, saved }, view);

/** Field by field what is yours and what is saved, where they differ. The run has revisions of its own. */
export function differences(
  yours: RowDraft,
  saved: RowDraft,
  taskIds: readonly string[],
): Difference[] {
  const cells: CellId[] = [
    "start",
    "length",
    ...taskIds.map(taskCell),
    "unaccounted",
    "worn",
    ...taskIds.map(wornCell),
  ];
  const found: Difference[] = cells.flatMap((cell) => {
    const [mine, theirs] = [yours.cells[cell], saved.cells[cell]];
    const isSame =
      cell === "unaccounted" ? isUnknown(mine) === isUnknown(theirs) : sameCell(mine, theirs);
    return isSame ? [] : [{ cell, yours: mine, saved: theirs }];
  });
  if (yours.note !== saved.note) found.push({ cell: "note", yours: yours.note, saved: saved.note });
  return found;
}

/** The row as chosen: on top of the saved revision, with what was taken from yours. */
export function mergeRow(
  yours: RowDraft,
  saved: RowDraft,
  taken: ReadonlySet<Difference["cell"]>,
): RowDraft {
  const cells: Partial<Record<CellId, Cell>> = { ...saved.cells };
  for (const cell of taken) {
    if (cell === "note") continue;
    const mine = yours.cells[cell];
    if (mine) cells[cell] = { ...mine, mark: "typed" };
    else delete cells[cell];
  }
  if (yours.isRunTouched && yours.cells.reading) cells.reading = yours.cells.reading;
  return {
    ...saved,
    cells,
    note: taken.has("note") ? yours.note : saved.note,
    whichHour: taken.has("start") ? yours.whichHour : saved.whichHour,
    confirmsWholeDay: taken.has("length") ? yours.confirmsWholeDay : saved.confirmsWholeDay,
    runSetup: yours.isRunTouched ? yours.runSetup : saved.runSetup,
    isRunTouched: yours.isRunTouched,
    answered: yours.answered,
    isTouched: taken.size > 0 || yours.isRunTouched,
    isConfirmed: false,
  };
}

/** Whether a row was typed, or confirmed, to the same as somebody else has saved since. */
function saysAsSaved(row: RowDraft, gridRow: GridRow, view: DayGridView): boolean {
  if (row.isRunTouched) return false;
  if (row.isAbsent) return gridRow.isAbsent;
  const { saved } = gridRow;
  if (saved === null || gridRow.isAbsent || !isBehind(row, gridRow)) return false;
  const theirs = savedRow(gridRow, saved, view);
  const taskIds = view.tasks.map(({ id }) => id);
  return row.whichHour === theirs.whichHour && differences(row, theirs, taskIds).length === 0;
}

/** Rows that say what somebody else has saved since are stored: there is nothing to choose between the two. */
export function settleSame(draft: DayDraft, view: DayGridView): DayDraft {
  const gridRows = new Map(view.rows.map((row) => [row.worker.id, row]));
  return {
    ...draft,
    rows: draft.rows.map((row) => {
      const gridRow = gridRows.get(row.workerId);
      return gridRow && saysAsSaved(row, gridRow, view) ? openRow(gridRow, view) : row;
    }),
  };
}
