import type { MeterSettings } from "../../../shared/acoustics/types";
import type {
  DayGridView,
  DaySaveView,
  GridRow,
  GridRun,
  SavedShift,
  ShiftTaskInput,
} from "../../../shared/schemas/shift";
import { type Cell, type CellMark, type CellValue, cellOf, emptyCell } from "./cells";
import { type CellId, taskCell, wornCell } from "./columns";

export type RowIssue = DaySaveView["refused"][number]["issues"][number];

/** What belongs to a reading beside its figure. */
export interface ReadingSetup {
  readonly instrumentId: string;
  readonly settings: MeterSettings;
  /** Run time; null: as long as the shift. */
  readonly durationMin: number | null;
  readonly covers: "shift" | "projected" | "part";
}

/** A worker's row as it stands on this device. Every change makes a new object, so that only it is evaluated anew. */
export interface RowDraft {
  readonly workerId: string;
  /** The shift and revision that the row starts from; null where nothing is saved. */
  readonly base: { readonly shiftId: string; readonly revision: number } | null;
  readonly isAbsent: boolean;
  /** Something was typed or chosen since the row was opened or saved. */
  readonly isTouched: boolean;
  /** Somebody looked at it and said that it is so. */
  readonly isConfirmed: boolean;
  readonly cells: Readonly<Partial<Record<CellId, Cell>>>;
  readonly whichHour: "first" | "second" | null;
  readonly confirmsWholeDay: boolean;
  readonly note: string;
  readonly readingSetup: ReadingSetup | null;
  readonly isReadingTouched: boolean;
  /** Questions that were answered with "it is right". */
  readonly answered: readonly string[];
  /** What the server said no with, until the row changes. */
  readonly refused: readonly RowIssue[];
}

export interface DayDraft {
  readonly rows: readonly RowDraft[];
  readonly addedTaskIds: readonly string[];
}

export type RowPatch = Partial<
  Pick<
    RowDraft,
    "whichHour" | "confirmsWholeDay" | "note" | "readingSetup" | "isReadingTouched" | "answered"
  >
>;

export interface CellChange {
  readonly workerId: string;
  readonly cell: CellId;
  readonly value: Cell;
}

export type DraftAction =
  | { type: "set-cells"; changes: readonly CellChange[] }
  | { type: "restore-row"; row: RowDraft }
  | { type: "patch-row"; workerId: string; patch: RowPatch }
  | {
      type: "confirm-rows";
      workerIds: readonly string[];
      answered: Readonly<Record<string, readonly string[]>>;
    }
  | { type: "set-absent"; workerId: string; isAbsent: boolean }
  | { type: "copy-last"; rows: readonly GridRow[] }
  | { type: "add-task"; taskId: string }
  | { type: "replace"; draft: DayDraft };

/** Of a run with several settings rows the grid shows the first and changes none: the run's own page does. */
export function editableRun(readings: readonly GridRun[]): GridRun | null {
  const [first] = readings;
  return first && readings.filter(({ runId }) => runId === first.runId).length === 1 ? first : null;
}

type Cells = Partial<Record<CellId, Cell>>;

function put(cells: Cells, id: CellId, value: CellValue | null, mark: CellMark): void {
  if (value !== null) cells[id] = cellOf(value, mark);
}

function putTasks(cells: Cells, tasks: readonly ShiftTaskInput[], mark: CellMark): void {
  for (const { taskId, durationMin, wornPct, wornIsShiftWide } of tasks) {
    put(cells, taskCell(taskId), durationMin, mark);
    if (wornIsShiftWide) put(cells, "worn", wornPct, mark);
    else put(cells, wornCell(taskId), wornPct, mark);
  }
}

/** The last observed wearing time: one figure where every task has the same, else each task its own. Unknown stays empty. */
function putLastWorn(
  cells: Cells,
  taskIds: readonly string[],
  lastWorn: GridRow["lastWorn"],
  needsProtector: (taskId: string) => boolean,
): void {
  const worn = taskIds.filter(needsProtector);
  const shares = worn.map((taskId) => lastWorn[taskId] ?? null);
  const [first = null] = shares;
  if (first !== null && shares.every((share) => share === first))
    put(cells, "worn", first, "filled");
  else for (const taskId of worn) put(cells, wornCell(taskId), lastWorn[taskId] ?? null, "filled");
}

function savedCells(saved: SavedShift): Cells {
  const cells: Cells = {};
  put(cells, "start", saved.localStart, "saved");
  put(cells, "length", saved.lengthMin, "saved");
  put(cells, "unaccounted", saved.unaccounted, "saved");
  putTasks(cells, saved.tasks, "saved");
  return cells;
}

function readingCell(readings: readonly GridRun[]): Cell | null {
  const [run] = readings;
  if (!run) return null;
  if (run.averageDb !== null) return cellOf({ kind: "level", levelDb: run.averageDb }, "saved");
  return run.dosePct === null ? null : cellOf({ kind: "dose", dosePct: run.dosePct }, "saved");
}

/** A row as it opens: what is saved; else filled in from roster and nominal day, so that only departures are typed. */
export function openRow(row: GridRow, view: DayGridView): RowDraft {
  const { saved, nominal, worker, readings } = row;
  let cells: Cells = {};
  if (saved) cells = savedCells(saved);
  else {
    put(cells, "start", view.crew.usualStart, "filled");
    put(cells, "length", view.crew.usualLengthMin, "filled");
    for (const { taskId, durationMin } of nominal)
      put(cells, taskCell(taskId), durationMin, "filled");
    const isLoud = (taskId: string) => {
      const task = view.tasks.find(({ id }) => id === taskId);
      return (
        task !== undefined &&
        (task.zone !== "none" ||
          (task.level !== null && task.level.levelDb >= view.settings.wearFromDb))
      );
    };
    const taskIds = nominal.map(({ taskId }) => taskId);
    if (row.assignments.length > 0) putLastWorn(cells, taskIds, row.lastWorn, isLoud);
  }
  const reading = readingCell(readings);
  if (reading) cells.reading = reading;
  const run = editableRun(readings);
  return {
    workerId: worker.id,
    base: saved && { shiftId: saved.shiftId, revision: saved.revision },
    isAbsent: row.isAbsent,
    isTouched: false,
    isConfirmed: false,
    cells,
    whichHour: saved?.whichHour ?? null,
    confirmsWholeDay: saved?.lengthMin === 1440,
    note: saved?.note ?? "",
    readingSetup: run && {
      instrumentId: run.instrumentId,
      settings: run.settings,
      durationMin: run.durationMin,
      covers: run.covers,
    },
    isReadingTouched: false,
    answered: [],
    refused: [],
  };
}

export const openDay = (view: DayGridView): DayDraft => ({
  rows: view.rows.map((row) => openRow(row, view)),
  addedTaskIds: [],
});

/** Stored on the server just as it stands here. */
export const isSettled = (row: RowDraft, gridRow: GridRow): boolean =>
  !row.isTouched && (row.isAbsent ? gridRow.isAbsent : row.base !== null && !gridRow.isAbsent);

/** Somebody typed in it, or looked and confirmed: only then is it sent. */
export const isSpoken = (row: RowDraft, gridRow: GridRow): boolean =>
  !isSettled(row, gridRow) && (row.isTouched || row.isConfirmed);

function changeRow(row: RowDraft, change: Partial<RowDraft>): RowDraft {
  return { ...row, refused: [], isTouched: true, ...change };
}

function withCells(row: RowDraft, changes: readonly CellChange[]): RowDraft {
  const cells: Cells = { ...row.cells };
  let { isReadingTouched } = row;
  for (const { cell, value } of changes) {
    cells[cell] = value;
    if (cell === "reading") isReadingTouched = true;
    // One figure for the whole shift stands in place of the tasks' own.
    if (cell === "worn")
      for (const id of Object.keys(cells) as CellId[]) if (id.startsWith("worn:")) delete cells[id];
  }
  const isOtherTime = changes.some(({ cell }) => cell === "start");
  const isOtherLength = changes.some(({ cell }) => cell === "length");
  return changeRow(row, {
    cells,
    isReadingTouched,
    ...(isOtherTime && { whichHour: null }),
    ...(isOtherLength && { confirmsWholeDay: false }),
  });
}

/** What was worked last time, to be looked at; a reading belongs to its own day and is never copied. */
function copyLast(row: RowDraft, { lastShift }: GridRow): RowDraft {
  if (!lastShift) return row;
  const cells: Cells = {};
  put(cells, "start", lastShift.localStart, "filled");
  put(cells, "length", lastShift.lengthMin, "filled");
  put(cells, "unaccounted", lastShift.unaccounted, "filled");
  putTasks(cells, lastShift.tasks, "filled");
  const { reading } = row.cells;
  if (reading) cells.reading = reading;
  return {
    ...row,
    cells,
    isTouched: row.base !== null,
    isConfirmed: false,
    isAbsent: false,
    whichHour: null,
    confirmsWholeDay: false,
    answered: [],
    refused: [],
  };
}

export function reduceDraft(draft: DayDraft, action: DraftAction): DayDraft {
  const change = (workerId: string, next: (row: RowDraft) => RowDraft): DayDraft => ({
    ...draft,
    rows: draft.rows.map((row) => (row.workerId === workerId ? next(row) : row)),
  });
  switch (action.type) {
    case "replace":
      return action.draft;
    case "restore-row":
      return change(action.row.workerId, () => action.row);
    case "patch-row":
      return change(action.workerId, (row) => changeRow(row, action.patch));
    case "set-absent":
      return change(action.workerId, (row) =>
        row.isAbsent === action.isAbsent
          ? row
          : changeRow(row, { isAbsent: action.isAbsent, isConfirmed: false }),
      );
    case "add-task":
      return draft.addedTaskIds.includes(action.taskId)
        ? draft
        : { ...draft, addedTaskIds: [...draft.addedTaskIds, action.taskId] };
    case "set-cells": {
      const byWorker = new Map<string, CellChange[]>();
      for (const one of action.changes) {
        const known = byWorker.get(one.workerId);
        if (known) known.push(one);
        else byWorker.set(one.workerId, [one]);
      }
      return {
        ...draft,
        rows: draft.rows.map((row) => {
          const changes = byWorker.get(row.workerId);
          return changes ? withCells(row, changes) : row;
        }),
      };
    }
    case "confirm-rows": {
      const confirmed = new Set(action.workerIds);
      return {
        ...draft,
        rows: draft.rows.map((row) =>
          confirmed.has(row.workerId)
            ? {
                ...row,
                isConfirmed: true,
                refused: [],
                answered: [...new Set([...row.answered, ...(action.answered[row.workerId] ?? [])])],
              }
            : row,
        ),
      };
    }
    case "copy-last": {
      const sources = new Map(action.rows.map((row) => [row.worker.id, row]));
      return {
        ...draft,
        rows: draft.rows.map((row) => {
          const source = sources.get(row.workerId);
          return source ? copyLast(row, source) : row;
        }),
      };
    }
  }
}

/** Puts a newer view of the server under the draft: what is typed or confirmed here stays, the rest opens anew. */
export function rebaseDraft(draft: DayDraft, view: DayGridView): DayDraft {
  const known = new Map(draft.rows.map((row) => [row.workerId, row]));
  return {
    ...draft,
    rows: view.rows.map((gridRow) => {
      const row = known.get(gridRow.worker.id);
      return row && (row.isTouched || row.isConfirmed) ? row : openRow(gridRow, view);
    }),
  };
}

/** The shift on the server is another revision than the one this row was typed from. */
export const isBehind = (row: RowDraft, gridRow: GridRow): boolean =>
  (row.isTouched || row.isConfirmed) &&
  (row.base?.revision ?? null) !== (gridRow.saved?.revision ?? null);

export const clearedCell = (): Cell => emptyCell("typed");
