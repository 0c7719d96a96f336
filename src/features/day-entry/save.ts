import type {
  DayGridView,
  DayRowInput,
  DaySaveView,
  GridRow,
  SavedShift,
} from "../../../shared/schemas/shift";
import { isEndAhead } from "../../lib/end-ahead";
import {
  type DayDraft,
  enteredReadings,
  isSettled,
  isSpoken,
  openRow,
  type RowDraft,
  runOf,
} from "./draft";
import type { EvaluateRow, RowEvaluation, RowValues } from "./evaluate-rows";

/** Most rows that one request takes. */
const MOST_ROWS = 500;

export interface Collected {
  /** Rows to send, in the order of the request. */
  readonly rows: readonly DayRowInput[];
  /** The drafts they were made of, so that what is typed while the request runs is not taken for saved. */
  readonly sent: readonly RowDraft[];
  /** Saved shifts that change: they need a reason. */
  readonly corrections: readonly string[];
  /** Shifts whose end still lies ahead: to be confirmed. */
  readonly openEnds: readonly string[];
  /** Typed back to what is saved already: nothing to send. */
  readonly unchanged: readonly string[];
}

type Worked = Extract<DayRowInput, { kind: "worked" }>;

const taskKey = (tasks: RowValues["tasks"]) =>
  JSON.stringify(
    tasks
      .map((task) => [task.taskId, task.durationMin, task.wornPct, task.wornIsShiftWide] as const)
      .toSorted(([a], [b]) => a.localeCompare(b)),
  );

/** Whether a row says what is stored already. */
export function saysTheSame(values: RowValues, note: string, saved: SavedShift): boolean {
  return (
    values.localStart === saved.localStart &&
    values.lengthMin === saved.lengthMin &&
    JSON.stringify(values.unaccounted) === JSON.stringify(saved.unaccounted) &&
    note === (saved.note ?? "") &&
    taskKey(values.tasks) === taskKey(saved.tasks)
  );
}

function enteredRun(row: RowDraft, gridRow: GridRow, lengthMin: number): Worked["run"] {
  const setup = row.runSetup;
  if (!row.isRunTouched || !setup) return null;
  const readings = enteredReadings(row, gridRow).map(({ facts }) => facts);
  if (readings.length === 0) return null;
  const [stored] = runOf(gridRow.readings);
  return {
    instrumentId: setup.instrumentId,
    runId: stored?.runId ?? null,
    runRevision: stored?.runRevision ?? null,
    durationMin: setup.durationMin ?? lengthMin,
    covers: setup.covers,
    readings,
  };
}

/** A row can be sent: somebody spoke for it, nothing is wrong with it, and every question is answered. */
export const isReady = (found: RowEvaluation, gridRow: GridRow): boolean =>
  isSpoken(found.row, gridRow) &&
  found.problems.every(({ kind }) => kind === "refused") &&
  found.questions.length === 0;

/** The rows that stand, for one request; the others stay where they are. */
export function collectRows(
  draft: DayDraft,
  view: DayGridView,
  evaluate: EvaluateRow,
  reason: string | null,
  confirmsOpenEnd = false,
  nowMs = Date.now(),
): Collected {
  const rows: DayRowInput[] = [];
  const sent: RowDraft[] = [];
  const corrections: string[] = [];
  const openEnds: string[] = [];
  const unchanged: string[] = [];
  const gridRows = new Map(view.rows.map((row) => [row.worker.id, row]));
  for (const row of draft.rows) {
    const gridRow = gridRows.get(row.workerId);
    if (!gridRow || rows.length > MOST_ROWS - 2) continue;
    const found = evaluate(row);
    if (!isReady(found, gridRow)) continue;
    const { workerId } = row;
    if (row.isAbsent) {
      if (gridRow.isAbsent) unchanged.push(workerId);
      else {
        rows.push({ kind: "absent", workerId });
        sent.push(row);
      }
      continue;
    }
    const { values } = found;
    if (!values) continue;
    const run = enteredRun(row, gridRow, values.lengthMin);
    const { saved } = gridRow;
    const isSame =
      saved !== null &&
      row.base?.revision === saved.revision &&
      saysTheSame(values, row.note, saved);
    if (gridRow.isAbsent) {
      rows.push({ kind: "not-absent", workerId });
      sent.push(row);
    }
    if (isSame && run === null) {
      if (!gridRow.isAbsent) unchanged.push(workerId);
      continue;
    }
    const isCorrection = (row.base !== null && !isSame) || (run?.runId ?? null) !== null;
    if (isCorrection) corrections.push(workerId);
    const isOpen =
      !isSame &&
      (row.refused.some(({ code }) => code === "open-end-unconfirmed") ||
        isEndAhead(view.date, { ...values, whichHour: row.whichHour }, view.crew.timeZone, nowMs));
    if (isOpen) openEnds.push(workerId);
    rows.push({
      kind: "worked",
      workerId,
      shiftId: row.base?.shiftId ?? null,
      revision: row.base?.revision ?? null,
      reason: isCorrection ? reason : null,
      localStart: values.localStart,
      whichHour: row.whichHour,
      lengthMin: values.lengthMin,
      unaccounted: values.unaccounted,
      // In the order they were saved in, so that the server can see what has not changed.
      tasks: inSavedOrder(values.tasks, saved),
      note: row.note === "" ? null : row.note,
      confirmsWholeDay: row.confirmsWholeDay,
      confirmsOpenEnd: isOpen && confirmsOpenEnd,
      run,
    });
    sent.push(row);
  }
  return { rows, sent, corrections, openEnds, unchanged };
}

function inSavedOrder(tasks: RowValues["tasks"], saved: SavedShift | null): Worked["tasks"] {
  const place = new Map(saved?.tasks.map(({ taskId }, index) => [taskId, index]));
  const last = Number.MAX_SAFE_INTEGER;
  return tasks.toSorted((a, b) => (place.get(a.taskId) ?? last) - (place.get(b.taskId) ?? last));
}

/** What the server knows now, after it answered. */
export function viewAfter(
  view: DayGridView,
  reply: DaySaveView,
  rows: readonly DayRowInput[],
): DayGridView {
  const saved = new Map<string, Partial<GridRow>>();
  for (const { index, workerId, shift, figures, readings } of reply.saved) {
    const kind = rows[index]?.kind;
    const change: Partial<GridRow> =
      kind === "worked" ? { saved: shift, figures, readings } : { isAbsent: kind === "absent" };
    saved.set(workerId, { ...saved.get(workerId), ...change });
  }
  for (const { workerId, current } of reply.conflicts) {
    saved.set(workerId, { ...saved.get(workerId), saved: current });
  }
  return {
    ...view,
    rows: view.rows.map((row) => ({ ...row, ...saved.get(row.worker.id) })),
    notices: reply.notices.notices.length > 0 ? reply.notices : view.notices,
  };
}

/**
 * The draft after the server answered: what was stored is settled, what was refused carries the reason, what met
 * another's revision waits for a choice, and what was typed meanwhile stays typed on top of the new revision.
 */
export function draftAfter(
  draft: DayDraft,
  after: DayGridView,
  reply: Pick<DaySaveView, "saved" | "refused" | "conflicts">,
  { rows, sent, unchanged }: Collected,
): DayDraft {
  const gridRows = new Map(after.rows.map((row) => [row.worker.id, row]));
  const storedIndexes = new Set(reply.saved.map(({ index }) => index));
  const settled = new Map<string, RowDraft>();
  rows.forEach(({ workerId }, index) => {
    if (storedIndexes.has(index)) settled.set(workerId, sent[index] as RowDraft);
  });
  const refused = new Map(
    reply.refused.map(({ index, issues }) => [rows[index]?.workerId, issues]),
  );
  const conflicted = new Set(reply.conflicts.map(({ workerId }) => workerId));
  return {
    ...draft,
    rows: draft.rows.map((row) => {
      const gridRow = gridRows.get(row.workerId);
      if (!gridRow || conflicted.has(row.workerId)) return row;
      const issues = refused.get(row.workerId);
      if (issues) return { ...row, refused: issues };
      if (unchanged.includes(row.workerId)) return openRow(gridRow, after);
      const was = settled.get(row.workerId);
      if (!was) return row;
      const opened = openRow(gridRow, after);
      return row === was ? opened : { ...row, base: opened.base };
    }),
  };
}

/** Rows that are stored and rows that are not. */
export function countRows(
  draft: DayDraft,
  view: DayGridView,
): { settled: number; waiting: number } {
  const gridRows = new Map(view.rows.map((row) => [row.worker.id, row]));
  let settled = 0;
  for (const row of draft.rows) {
    const gridRow = gridRows.get(row.workerId);
    if (gridRow && isSettled(row, gridRow)) settled += 1;
  }
  return { settled, waiting: draft.rows.length - settled };
}
