import type { MeterSettings } from "../../../shared/acoustics/types";
import type { ReadingFacts } from "../../../shared/schemas/evaluation";
import { isEmptyReading } from "../../../shared/schemas/run";
import type {
  DayGridView,
  DaySaveView,
  GridRow,
  GridRun,
  SavedShift,
  ShiftTaskInput,
} from "../../../shared/schemas/shift";
import { type Cell, type CellMark, type CellValue, cellOf, emptyCell, readingIn } from "./cells";
import { type CellId, taskCell, wornCell } from "./columns";

export type RowIssue = DaySaveView["refused"][number]["issues"][number];

/** What the same instrument said under further settings. */
export interface FurtherReading {
  readonly settings: MeterSettings;
  readonly cell: Cell;
  /** The stored reading that it opened with. */
  readonly readingId: string | null;
}

/** What belongs to a run beside the figure in the grid's cell. */
export interface RunSetup {
  readonly instrumentId: string;
  /** Those of the reading in the grid's cell. */
  readonly settings: MeterSettings;
  readonly further: readonly FurtherReading[];
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
  readonly runSetup: RunSetup | null;
  readonly isRunTouched: boolean;
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
    "whichHour" | "confirmsWholeDay" | "note" | "runSetup" | "isRunTouched" | "answered"
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

/** The stored run that a row shows and changes: the first of the day, reading by reading. */
export const runOf = (readings: readonly GridRun[]): readonly GridRun[] =>
  readings.filter(({ runId }) => runId === readings[0]?.runId);

/** A settings row of a run as it stands here, beside the stored reading that it opened with. */
export interface SettingsRow {
  readonly settings: MeterSettings;
  readonly cell: Cell | undefined;
  readonly stored: GridRun | null;
}

/** The run of a row, settings row by settings row; the first is that of the grid's cell. */
export function settingsRows(row: RowDraft, gridRow: GridRow): SettingsRow[] {
  if (!row.runSetup) return [];
  const run = runOf(gridRow.readings);
  const { settings, further } = row.runSetup;
  return [
    { settings, cell: row.cells.reading, stored: run[0] ?? null },
    ...further.map(({ settings: others, cell, readingId }) => ({
      settings: others,
      cell,
      stored: run.find((one) => one.readingId === readingId) ?? null,
    })),
  ];
}

/** What a settings row says; null where nothing was read under its settings. What is not shown here stays as it is. */
function factsOf({ settings, cell, stored }: SettingsRow): ReadingFacts | null {
  const kept = {
    lceqDb: stored?.lceqDb ?? null,
    lasMaxDb: stored?.lasMaxDb ?? null,
    peak: stored?.peak ?? null,
  };
  const value = readingIn(cell);
  const isAsStored = stored !== null && (!cell || cell.mark === "saved");
  const facts = {
    settings: settings as ReadingFacts["settings"],
    dosePct: isAsStored ? stored.dosePct : value?.kind === "dose" ? value.dosePct : null,
    averageDb: isAsStored ? stored.averageDb : value?.kind === "level" ? value.levelDb : null,
    ...kept,
  };
  return isEmptyReading(facts) ? null : facts;
}

/** The readings of a row's run as they are to be stored, each with the stored one that it takes the place of. */
export const enteredReadings = (
  row: RowDraft,
  gridRow: GridRow,
): { facts: ReadingFacts; stored: GridRun | null }[] =>
  settingsRows(row, gridRow).flatMap((one) => {
    const facts = factsOf(one);
    return facts ? [{ facts, stored: one.stored }] : [];
  });

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

function readingCell({ averageDb, dosePct }: GridRun): Cell {
  if (averageDb !== null) return cellOf({ kind: "level", levelDb: averageDb }, "saved");
  return dosePct === null ? emptyCell("saved") : cellOf({ kind: "dose", dosePct }, "saved");
}

/** A row as it opens: what is saved; else filled in from roster and nominal day, so that only departures are typed. */
export function openRow(row: GridRow, view: DayGridView): RowDraft {
  const { saved, nominal, worker, readings } = row;
  let cells: Cells = {};
  if (saved) cells = savedCells(saved);
  // Whose day stands with another shift is not filled in with a second one.
  else if (row.otherShifts.length === 0) {
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
  const [first, ...further] = runOf(readings);
  if (first) cells.reading = readingCell(first);
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
    runSetup: first
      ? {
          instrumentId: first.instrumentId,
          settings: first.settings,
          further: further.map((one) => ({
            settings: one.settings,
            cell: readingCell(one),
            readingId: one.readingId,
          })),
          durationMin: first.durationMin,
          covers: first.covers,
        }
      : null,
    isRunTouched: false,
    answered: [],
    refused: [],
  };
}

export const openDay = (view: DayGridView): DayDraft => ({
  rows: view.rows.map((row) => openRow(row, view)),
  addedTaskIds: [],
});

/** The day stands with another shift, and nobody has said anything of one with this crew. */
export const isElsewhere = (row: RowDraft, gridRow: GridRow): boolean =>
  gridRow.saved === null &&
  gridRow.otherShifts.length > 0 &&
  !row.isAbsent &&
  !row.isTouched &&
  row.cells.start === undefined;

/** Stored on the server just as it stands here, or with nothing to store. */
export const isSettled = (row: RowDraft, gridRow: GridRow): boolean =>
  isElsewhere(row, gridRow) ||
  (!row.isTouched && (row.isAbsent ? gridRow.isAbsent : row.base !== null && !gridRow.isAbsent));

/** Somebody typed in it, or looked and confirmed: only then is it sent. */
export const isSpoken = (row: RowDraft, gridRow: GridRow): boolean =>
  !isSettled(row, gridRow) && (row.isTouched || row.isConfirmed);

function changeRow(row: RowDraft, change: Partial<RowDraft>): RowDraft {
  return { ...row, refused: [], isTouched: true, ...change };
}

function withCells(row: RowDraft, changes: readonly CellChange[]): RowDraft {
  const cells: Cells = { ...row.cells };
  let { isRunTouched } = row;
  for (const { cell, value } of changes) {
    cells[cell] = value;
    if (cell === "reading") isRunTouched = true;
    // One figure for the whole shift stands in place of the tasks' own.
    if (cell === "worn")
      for (const id of Object.keys(cells) as CellId[]) if (id.startsWith("worn:")) delete cells[id];
  }
  const isOtherTime = changes.some(({ cell }) => cell === "start");
  const isOtherLength = changes.some(({ cell }) => cell === "length");
  return changeRow(row, {
    cells,
    isRunTouched,
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
