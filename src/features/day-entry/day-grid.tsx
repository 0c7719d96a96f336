import { useLingui } from "@lingui/react";
import {
  type ClipboardEvent,
  type FormEvent,
  type KeyboardEvent,
  type MouseEvent,
  useEffect,
  useLayoutEffect,
  useMemo,
  useRef,
  useState,
} from "react";
import { formatLevel } from "../../../shared/format/level";
import { editNumber } from "../../../shared/format/number";
import { StripScale } from "../../components/drop-strip";
import { useLocale } from "../../lib/i18n";
import { editText, parseCell } from "./cells";
import type { GridColumn } from "./columns";
import { clearedCell, isSettled, type RowDraft } from "./draft";
import { isAlone, isTyping, placeAfterKey, placeAfterTab } from "./grid-keys";
import type { GridLayout } from "./grid-layout";
import { type GridFrame, GridRow, type MendAction, STRIP_WIDTH_PX } from "./grid-row";
import { MANY_ROWS, rowTops, visibleSegments } from "./grid-window";
import {
  copyRange,
  fillDown,
  isBlock,
  type Pasted,
  type Place,
  parseBlock,
  pasteBlock,
  rangeOf,
} from "./paste";
import { rowState } from "./row-state";
import { withSoftHyphens } from "./syllables";
import type { DayEntryState, StepsBack } from "./use-day-entry";
import { columnName, unaccountedWords } from "./words";

const ROW_PX = 48;
const BELOW_PX = 38;
const PAGE_ROWS = 10;

/** A place with the focus; `wish` counts how often it was asked to go there. */
export interface GridFocus extends Place {
  readonly wish: number;
}

interface Edit {
  readonly text: string;
  readonly before: RowDraft;
  readonly begun: StepsBack;
  /** Begun by typing over the cell: the arrows then leave it. */
  readonly isOver: boolean;
}

export interface DayGridProps {
  readonly entry: DayEntryState;
  readonly frame: GridFrame;
  readonly layout: GridLayout;
  readonly label: string;
  readonly focus: GridFocus;
  readonly onFocus: (place: Place) => void;
  readonly onSave: () => void;
  readonly onSay: (message: string) => void;
  readonly onMend: (workerId: string, action: MendAction) => void;
}

export function DayGrid({
  entry,
  frame,
  layout,
  label,
  focus,
  onFocus,
  onSave,
  onSay,
  onMend,
}: DayGridProps) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const words = unaccountedWords(i18n);
  const { columns } = frame;
  const { draft, found, view, dispatch, behind } = entry;
  const regionRef = useRef<HTMLDivElement>(null);
  const [anchor, setAnchor] = useState<Place | null>(null);
  const [edit, setEdit] = useState<Edit | null>(null);
  const [leaves, setLeaves] = useState(false);
  const [scroll, setScroll] = useState({ top: 0, heightPx: 800 });
  /** The row as it was before its worker was marked absent by the key that was pressed last. */
  const begun = useRef<{ row: RowDraft; steps: StepsBack } | null>(null);
  const shape = { rowCount: draft.rows.length, columns };
  const isLong = draft.rows.length > MANY_ROWS;
  const selection = rangeOf(anchor ?? focus, focus);
  const gridRows = useMemo(() => new Map(view.rows.map((row) => [row.worker.id, row])), [view]);
  const behindSet = useMemo(() => new Set(behind), [behind]);

  const tops = useMemo(
    () =>
      rowTops(
        found.map(
          ({ problems, questions, row }) =>
            ROW_PX +
            BELOW_PX * (problems.length + questions.length + (behindSet.has(row.workerId) ? 1 : 0)),
        ),
      ),
    [found, behindSet],
  );
  const segments = isLong
    ? visibleSegments(tops, scroll.top, scroll.heightPx, focus.row)
    : draft.rows.map((_, index) => ({ kind: "row" as const, index }));

  // The cell takes the focus once it is drawn, and only when somebody went there.
  const seenWish = useRef(focus.wish);
  const wasEditing = useRef(false);
  useLayoutEffect(() => {
    const region = regionRef.current;
    const isAsked = focus.wish !== seenWish.current;
    const isEditing = edit !== null;
    const changedEditing = isEditing !== wasEditing.current;
    if (!region || (!isAsked && !changedEditing)) return;
    seenWish.current = focus.wish;
    wasEditing.current = isEditing;
    const cell =
      region.querySelector<HTMLElement>(
        `[data-row="${focus.row}"][data-column="${focus.column}"]`,
      ) ?? region.querySelector<HTMLElement>(`[data-row="${focus.row}"]`);
    const editor = cell?.querySelector<HTMLInputElement>("[data-cell-editor]");
    if (editor) {
      editor.focus();
      editor.setSelectionRange(editor.value.length, editor.value.length);
    } else if (isAsked || region.contains(document.activeElement) || !document.activeElement) {
      cell?.focus({ preventScroll: isLong });
    } else if (changedEditing && document.activeElement === document.body) cell?.focus();
    if (isLong && cell) keepInSight(region, tops[focus.row] ?? 0, tops[focus.row + 1] ?? 0);
  });

  useEffect(() => {
    const region = regionRef.current;
    if (!region || !isLong) return;
    const measure = () => setScroll({ top: region.scrollTop, heightPx: region.clientHeight });
    measure();
    region.addEventListener("scroll", measure, { passive: true });
    return () => region.removeEventListener("scroll", measure);
  }, [isLong]);

  // Wherever on the page somebody is: in the grid, in the row's form, or nowhere after a button that is gone.
  const pageKeys = useRef<(event: globalThis.KeyboardEvent) => void>(() => undefined);
  pageKeys.current = (event) => {
    const isSave = event.key === "Enter" && (event.ctrlKey || event.metaKey);
    if (event.isComposing || !(isSave || event.key === "F8")) return;
    if (document.querySelector("dialog[open]")) return;
    event.preventDefault();
    if (isSave) {
      setEdit(null);
      onSave();
    } else goToProblem();
  };
  useEffect(() => {
    const listen = (event: globalThis.KeyboardEvent) => pageKeys.current(event);
    window.addEventListener("keydown", listen);
    return () => window.removeEventListener("keydown", listen);
  }, []);

  const rowAt = (at: number) => draft.rows[at];
  const columnAt = (at: number): GridColumn | undefined => columns[at];

  function go(place: Place, isExtending = false) {
    begun.current = null;
    setLeaves(false);
    setEdit(null);
    setAnchor(isExtending ? (anchor ?? { row: focus.row, column: focus.column }) : null);
    onFocus(place);
  }

  function beginEdit(text: string | null) {
    const row = rowAt(focus.row);
    const cell = columnAt(focus.column)?.cell;
    if (!row || !cell) return;
    if (row.isAbsent) {
      onSay(i18n.t("Absent. Press a to take it back."));
      return;
    }
    setAnchor(null);
    setLeaves(false);
    setEdit({
      text: text ?? editText(row.cells[cell], locale, words),
      before: row,
      begun: entry.beginStep(),
      isOver: text !== null,
    });
    if (text !== null) write(row, text);
  }

  function write(row: RowDraft, text: string) {
    const cell = columnAt(focus.column)?.cell;
    if (!cell) return;
    const value = parseCell(cell, text, locale, words);
    dispatch({ type: "set-cells", changes: [{ workerId: row.workerId, cell, value }] });
  }

  function confirmRow() {
    const row = rowAt(focus.row);
    const one = found[focus.row];
    const gridRow = row && gridRows.get(row.workerId);
    if (!row || !one || !gridRow) return;
    setEdit(null);
    if (one.problems.length > 0) {
      onSay(i18n.t("Row {row} has something to mend first.", { row: focus.row + 1 }));
      return;
    }
    if (!isSettled(row, gridRow)) {
      const answered = { [row.workerId]: one.questions.map(({ key }) => key) };
      dispatch({ type: "confirm-rows", workerIds: [row.workerId], answered });
    }
    go({ row: Math.min(focus.row + 1, draft.rows.length - 1), column: focus.column });
  }

  function toggleAbsent() {
    const row = rowAt(focus.row);
    if (!row) return;
    const steps = entry.beginStep();
    dispatch({ type: "set-absent", workerId: row.workerId, isAbsent: !row.isAbsent });
    go(focus);
    // Only now: going somewhere ends what an earlier press began.
    begun.current = row.isAbsent ? null : { row, steps };
  }

  /** The letter was the first of a word, and the worker is not absent: the word goes into the cell, whatever it is. */
  function writeWord({ row, steps }: { row: RowDraft; steps: StepsBack }, text: string) {
    entry.abandon(row, steps);
    setAnchor(null);
    setEdit({ text, before: row, begun: steps, isOver: true });
    write(row, text);
  }

  function goToProblem() {
    const places = found.flatMap(({ problems, questions, row }, at) => {
      const cells = [...problems, ...questions].map(({ cell }) =>
        Math.max(
          0,
          columns.findIndex((column) => column.cell === ownColumn(cell)),
        ),
      );
      if (behindSet.has(row.workerId)) cells.push(0);
      return [...new Set(cells)].sort((a, b) => a - b).map((column) => ({ row: at, column }));
    });
    const [first] = places;
    if (!first) {
      onSay(i18n.t("Nothing is wrong in any row."));
      return;
    }
    const isAfter = (place: Place) =>
      place.row > focus.row || (place.row === focus.row && place.column > focus.column);
    go(places.find(isAfter) ?? first);
  }

  function clearSelection() {
    const changes = draft.rows
      .slice(selection.fromRow, selection.toRow + 1)
      .filter(({ isAbsent }) => !isAbsent)
      .flatMap(({ workerId }) =>
        columns
          .slice(selection.fromColumn, selection.toColumn + 1)
          .flatMap(({ cell }) => (cell ? [{ workerId, cell, value: clearedCell() }] : [])),
      );
    if (changes.length > 0) dispatch({ type: "set-cells", changes });
  }

  function onKeyDown(event: KeyboardEvent<HTMLDivElement>) {
    const target = event.target as HTMLElement;
    const isEditor = target.matches("[data-cell-editor]");
    if (!isEditor && !target.matches("[data-row]")) return;
    const isControl = event.ctrlKey || event.metaKey;
    if (event.nativeEvent.isComposing) return;
    const took = onCommonKey(event, isControl) || (isEditor ? onEditKey(event) : onCellKey(event));
    if (took) event.preventDefault();
  }

  /** Keys that do the same whether a cell is being written or not. */
  function onCommonKey(event: KeyboardEvent, isControl: boolean): boolean {
    if (event.key === "Enter" && !isControl) {
      if (event.shiftKey) confirmRow();
      else go({ row: Math.min(focus.row + 1, draft.rows.length - 1), column: focus.column });
      return true;
    }
    if (event.key === "Tab") {
      if (leaves) return false;
      const next = placeAfterTab(event.shiftKey, focus, shape);
      if (next) go(next);
      else setEdit(null);
      return next !== null;
    }
    if (isControl && event.key.toLowerCase() === "d") {
      setEdit(null);
      const changes = fillDown(selection, draft.rows, columns);
      if (changes.length > 0) dispatch({ type: "set-cells", changes });
      return true;
    }
    return false;
  }

  function onEditKey(event: KeyboardEvent): boolean {
    if (!edit) return false;
    if (event.key === "Escape") {
      entry.abandon(edit.before, edit.begun);
      setEdit(null);
      return true;
    }
    const isSideways = event.key === "ArrowLeft" || event.key === "ArrowRight";
    const isUpDown = event.key === "ArrowUp" || event.key === "ArrowDown";
    if (!isUpDown && !(isSideways && edit.isOver)) return false;
    const next = placeAfterKey(event.key, false, focus, shape, PAGE_ROWS);
    if (next) go(next);
    return next !== null;
  }

  function onCellKey(event: KeyboardEvent): boolean {
    const { key } = event;
    const before = begun.current;
    begun.current = null;
    const isControl = event.ctrlKey || event.metaKey;
    const next = placeAfterKey(key, isControl, focus, shape, PAGE_ROWS);
    if (next) {
      go(next, event.shiftKey);
      return true;
    }
    if (key === "F2") {
      if (columnAt(focus.column)?.cell) beginEdit(null);
      else document.getElementById("row-details")?.focus();
      return true;
    }
    if (key === "Escape") {
      setAnchor(null);
      setLeaves(true);
      onSay(i18n.t("Tab now leaves the grid."));
      return true;
    }
    if (key === "Delete" || key === "Backspace") {
      clearSelection();
      return true;
    }
    if (isControl && key.toLowerCase() === "z") {
      entry.undo();
      return true;
    }
    if (isControl && key.toLowerCase() === "a") {
      setAnchor({ row: 0, column: 0 });
      onFocus({ row: draft.rows.length - 1, column: columns.length - 2 });
      return true;
    }
    if (isAlone(event, "a")) {
      if (!event.repeat) toggleAbsent();
      return true;
    }
    if (!isTyping(event)) return false;
    if (before && columnAt(focus.column)?.cell) writeWord(before, `a${key}`);
    else beginEdit(key);
    return true;
  }

  function onInput(event: FormEvent<HTMLDivElement>) {
    const target = event.target as HTMLElement;
    const row = rowAt(focus.row);
    if (!(target instanceof HTMLInputElement) || !target.matches("[data-cell-editor]")) return;
    if (!edit || !row) return;
    setEdit({ ...edit, text: target.value });
    write(row, target.value);
  }

  function onMouseDown(event: MouseEvent<HTMLDivElement>) {
    const place = placeOf(event.target);
    if (!place || event.button !== 0) return;
    const target = event.target as HTMLElement;
    if (target.closest("button, a, [data-cell-editor]")) return;
    // The browser would put the focus itself, and with Shift mark text.
    event.preventDefault();
    const isSame = place.row === focus.row && place.column === focus.column;
    const hasFocus = regionRef.current?.contains(document.activeElement) === true;
    if (isSame && hasFocus && !event.shiftKey && event.detail === 2) beginEdit(null);
    else go(place, event.shiftKey);
  }

  function onFocusIn(event: React.FocusEvent<HTMLDivElement>) {
    const place = placeOf(event.target);
    // A screen reader, or Tab from outside, comes straight to the cell.
    if (!place || (place.row === focus.row && place.column === focus.column)) return;
    if (rowAt(place.row)?.isAbsent && place.row === focus.row) return;
    onFocus(place);
  }

  function onCopy(event: ClipboardEvent<HTMLDivElement>, isCut = false) {
    if ((event.target as HTMLElement).matches("input")) return;
    event.preventDefault();
    const text = copyRange(
      selection,
      draft.rows,
      columns,
      (row, column) => workedOutText(row, column),
      locale,
      words,
    );
    event.clipboardData.setData("text/plain", text);
    if (isCut) clearSelection();
    onSay(
      i18n.t("Copied {rows} × {columns}.", {
        rows: selection.toRow - selection.fromRow + 1,
        columns: selection.toColumn - selection.fromColumn + 1,
      }),
    );
  }

  function workedOutText(row: RowDraft, column: GridColumn): string {
    const one = entry.evaluate(row);
    if (column.id === "sum") return editNumber(one.sumMin, locale);
    if (column.id === "protector") return one.protectors.map(({ name }) => name).join(", ");
    return one.summary?.atEarDb == null ? "" : formatLevel(one.summary.atEarDb, locale);
  }

  function onPaste(event: ClipboardEvent<HTMLDivElement>) {
    const text = event.clipboardData.getData("text/plain");
    const isEditor = (event.target as HTMLElement).matches("input");
    if (text === "" || (isEditor && !isBlock(text))) return;
    event.preventDefault();
    setEdit(null);
    const pasted = pasteBlock(parseBlock(text), selection, draft.rows, columns, locale, words);
    if (pasted.changes.length > 0) dispatch({ type: "set-cells", changes: pasted.changes });
    setAnchor({ row: pasted.range.toRow, column: pasted.range.toColumn });
    onFocus({ row: pasted.range.fromRow, column: pasted.range.fromColumn });
    onSay(pastedWords(pasted));
  }

  function pastedWords({ range, leftOut }: Pasted): string {
    const parts = [
      i18n.t("Pasted {rows} × {columns}.", {
        rows: range.toRow - range.fromRow + 1,
        columns: range.toColumn - range.fromColumn + 1,
      }),
    ];
    if (leftOut.rows > 0) {
      parts.push(
        i18n.t(
          "{count, plural, one {# row did not fit and was left out.} other {# rows did not fit and were left out.}}",
          { count: leftOut.rows },
        ),
      );
    }
    if (leftOut.columns > 0) {
      parts.push(
        i18n.t(
          "{count, plural, one {# column did not fit and was left out.} other {# columns did not fit and were left out.}}",
          { count: leftOut.columns },
        ),
      );
    }
    if (leftOut.absent > 0) {
      parts.push(
        i18n.t(
          "{count, plural, one {# worker is absent and was left out.} other {# workers are absent and were left out.}}",
          { count: leftOut.absent },
        ),
      );
    }
    return parts.join(" ");
  }

  function undoAbsent(workerId: string) {
    dispatch({ type: "set-absent", workerId, isAbsent: false });
    // The button is gone with the absence.
    go({ row: draft.rows.findIndex((row) => row.workerId === workerId), column: focus.column });
  }

  const latest = useRef({ onMend, undoAbsent });
  latest.current = { onMend, undoAbsent };
  const [stable] = useState(() => ({
    mend: (workerId: string, action: MendAction) => latest.current.onMend(workerId, action),
    undoAbsent: (workerId: string) => latest.current.undoAbsent(workerId),
  }));

  return (
    // biome-ignore lint/a11y/noStaticElementInteractions: the cells have the focus; their keys and clipboard are heard here
    <div
      ref={regionRef}
      className={`day-grid-region${isLong ? " is-long" : ""}${frame.isWide ? "" : " is-narrow"}`}
      onKeyDown={onKeyDown}
      onInput={onInput}
      onMouseDown={onMouseDown}
      onFocus={onFocusIn}
      onBlur={(event) => {
        const next = event.relatedTarget;
        if (next && regionRef.current?.contains(next)) return;
        setLeaves(false);
        if (next) setEdit(null);
      }}
      onCopy={onCopy}
      onCut={(event) => onCopy(event, true)}
      onPaste={onPaste}
    >
      <table
        className="day-grid"
        // biome-ignore lint/a11y/noNoninteractiveElementToInteractiveRole: a grid of cells that are typed in
        role="grid"
        aria-label={label}
        aria-rowcount={draft.rows.length + 2}
        aria-colcount={columns.length + 1}
        aria-multiselectable="true"
        aria-describedby="day-grid-keys"
        style={{ minWidth: layout.minWidthPx }}
      >
        <GridHead frame={frame} layout={layout} />
        <tbody>
          {segments.map((segment, at) => {
            if (segment.kind === "gap") {
              return (
                // biome-ignore lint/suspicious/noArrayIndexKey: a gap has no other name than its place
                <tr key={`gap ${at}`} style={{ height: segment.heightPx }} />
              );
            }
            const { index } = segment;
            const one = found[index];
            const gridRow = one && gridRows.get(one.row.workerId);
            if (!one || !gridRow) return null;
            const hasFocus = focus.row === index;
            const isSelected =
              anchor !== null && index >= selection.fromRow && index <= selection.toRow;
            return (
              <GridRow
                key={one.row.workerId}
                found={one}
                gridRow={gridRow}
                index={index}
                state={rowState(one, gridRow, behindSet.has(one.row.workerId))}
                frame={frame}
                focusColumn={hasFocus ? focus.column : null}
                selectedFrom={isSelected ? selection.fromColumn : null}
                selectedTo={isSelected ? selection.toColumn : null}
                editing={hasFocus && edit ? edit.text : null}
                onMend={stable.mend}
                onUndoAbsent={stable.undoAbsent}
              />
            );
          })}
        </tbody>
      </table>
    </div>
  );
}

/** A share of one task has no column; it is mended where the shift's share stands. */
const ownColumn = (cell: string) => (cell.startsWith("worn:") ? "worn" : cell);

function placeOf(target: EventTarget): Place | null {
  const cell = (target as HTMLElement).closest<HTMLElement>("[data-row]");
  if (!cell) return null;
  return { row: Number(cell.dataset.row), column: Number(cell.dataset.column) };
}

/** Head of the grid, px: what is under it is not in sight. */
const HEAD_PX = 96;

function keepInSight(region: HTMLElement, top: number, bottom: number): void {
  const room = region.clientHeight - HEAD_PX;
  if (top < region.scrollTop) region.scrollTop = top;
  else if (bottom > region.scrollTop + room) region.scrollTop = bottom - room;
}

function GridHead({ frame, layout }: { frame: GridFrame; layout: GridLayout }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { columns, isWide } = frame;
  const widths = layout.fixedPx;
  const widthOf = ({ id, task }: GridColumn) => {
    if (task) return layout.tasksPx.get(task.id);
    return id === "protector" ? undefined : widths[id as Exclude<keyof typeof widths, "protector">];
  };
  const typed = columns.filter(({ id }) => id !== "result");
  const headName = (column: GridColumn) => {
    const name = columnName(i18n, column);
    return !column.task || layout.broken.has(column.task.id) ? withSoftHyphens(name) : name;
  };
  const unit = (column: GridColumn) => {
    if (column.task) return formatLevel(column.task.level?.levelDb ?? null, locale);
    switch (column.id) {
      case "unaccounted":
      case "length":
      case "sum":
        return i18n.t("min");
      case "reading":
        return i18n.t("dB or %");
      case "worn":
        return "%";
      default:
        return null;
    }
  };
  return (
    <>
      <colgroup>
        <col style={{ width: widths.who }} />
        {typed.map((column) => (
          <col key={column.id} style={{ width: widthOf(column) }} />
        ))}
        {isWide && <col style={{ width: widths.ear }} />}
        <col style={{ width: widths.strip }} />
        {isWide && <col style={{ width: widths.outside }} />}
        <col style={{ width: widths.word }} />
      </colgroup>
      <thead>
        <tr className="halves" aria-rowindex={1}>
          <td className="who" />
          <th colSpan={typed.length}>
            {i18n.t(
              "Filled in from the roster and the nominal day; you type what was different. Minutes in each task, its level in dB under the name",
            )}
          </th>
          <th colSpan={isWide ? 4 : 2} className="worked-out">
            {isWide ? i18n.t("Dinward works out, as you type") : i18n.t("Dinward works out")}
          </th>
        </tr>
        <tr className="heads" aria-rowindex={2}>
          <th scope="col" className="who">
            {i18n.t("Worker")}
          </th>
          {typed.map((column) => (
            <th key={column.id} scope="col" className={`is-${column.task ? "task" : column.id}`}>
              <span className="head-name">{headName(column)}</span>
              {unit(column) && <span className="unit">{unit(column)}</span>}
            </th>
          ))}
          {isWide && (
            <th scope="col" className="at-ear">
              {i18n.t("At the ear")}
              <span className="unit">{i18n.t("day, dB")}</span>
              {!frame.strip.hasLimitAtEar && (
                <span className="unit">{i18n.t("no limit there")}</span>
              )}
            </th>
          )}
          <th scope="col" className="strip-head">
            <StripScale
              limits={frame.strip.limits}
              targetBand={frame.strip.targetBand}
              widthPx={STRIP_WIDTH_PX}
            />
          </th>
          {isWide && (
            <th scope="col" className="outside">
              {i18n.t("Without protection")}
              {(frame.outsideBases.length > 0 ? frame.outsideBases : [i18n.t("dB")]).map((unit) => (
                <span key={unit} className="unit">
                  {unit}
                </span>
              ))}
            </th>
          )}
          <th scope="col" className="word">
            {isWide && i18n.t("Protector, while worn")}
            {!isWide &&
              (frame.strip.hasLimitAtEar
                ? i18n.t("At the ear; protector while worn")
                : i18n.t("Without protection; protector while worn"))}
            {isWide && <span className="unit">{i18n.t("dB")}</span>}
          </th>
        </tr>
      </thead>
    </>
  );
}
