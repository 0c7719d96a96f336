import type { GridTask } from "../../../shared/schemas/shift";

export type TaskCellId = `task:${string}`;
export type WornCellId = `worn:${string}`;
/** A cell of a row by what it holds. The share of one task (`worn:`) has no column: it stands in the row's form. */
export type CellId =
  | "start"
  | "length"
  | "unaccounted"
  | "reading"
  | "worn"
  | TaskCellId
  | WornCellId;
export type ColumnId = Exclude<CellId, WornCellId> | "sum" | "protector" | "result";

export interface GridColumn {
  readonly id: ColumnId;
  readonly task: GridTask | null;
  /** Typed by hand; the others can be visited, and read, by the arrows. */
  readonly cell: CellId | null;
}

export const taskCell = (taskId: string): TaskCellId => `task:${taskId}`;
export const wornCell = (taskId: string): WornCellId => `worn:${taskId}`;

const typed = (id: Exclude<CellId, WornCellId>, task: GridTask | null = null): GridColumn => ({
  id,
  task,
  cell: id,
});
const workedOut = (id: "sum" | "protector" | "result"): GridColumn => ({
  id,
  task: null,
  cell: null,
});

/** Columns from left to right: this crew's tasks, and those that somebody added for the day. */
export function gridColumns(
  tasks: readonly GridTask[],
  addedTaskIds: readonly string[],
): readonly GridColumn[] {
  const added = addedTaskIds.flatMap((id) => tasks.filter((task) => task.id === id));
  const shown = [
    ...tasks.filter((task) => task.isColumn),
    ...added.filter((task) => !task.isColumn),
  ];
  return [
    typed("start"),
    typed("length"),
    ...shown.map((task) => typed(taskCell(task.id), task)),
    typed("unaccounted"),
    workedOut("sum"),
    typed("reading"),
    workedOut("protector"),
    typed("worn"),
    workedOut("result"),
  ];
}
