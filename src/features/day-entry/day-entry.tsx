import { useLingui } from "@lingui/react";
import { type ReactNode, useMemo, useRef, useState, useSyncExternalStore } from "react";
import { formatDay, formatTime } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import type { EntryNotices as Notices } from "../../../shared/schemas/notice";
import type { DayGridView } from "../../../shared/schemas/shift";
import { Banner } from "../../components/banner";
import { Button, ButtonLink } from "../../components/button";
import { outsideBases, stripFrame } from "../../components/day-figures";
import { TextButton } from "../../components/link";
import { Folio, PageHead } from "../../components/page";
import { Status } from "../../components/status";
import { useLocale } from "../../lib/i18n";
import { problemText } from "../../lib/problem-text";
import { paths } from "../../paths";
import { cellOf } from "./cells";
import { gridColumns } from "./columns";
import { DayGrid, type GridFocus } from "./day-grid";
import { ConfirmDialog, ConflictDialog, OpenEndsDialog, ReasonDialog } from "./dialogs";
import { isSettled, type RowDraft } from "./draft";
import type { DraftStore } from "./draft-store";
import { EntryNotices } from "./entry-notices";
import { type RowEvaluation, rulesOf } from "./evaluate-rows";
import { gridLayout } from "./grid-layout";
import type { GridFrame, MendAction } from "./grid-row";
import type { Place } from "./paste";
import { KeyLegend, RowPanel } from "./row-panel";
import { isOnlyFilledIn, isWaiting, rowState } from "./row-state";
import { waitingSentences } from "./row-words";
import { countRows } from "./save";
import { useDayEntry } from "./use-day-entry";
import { WorkerByWorker } from "./worker-by-worker";

const PHONE = "(max-width: 759.98px)";

function useIsPhone(): boolean {
  return useSyncExternalStore(
    (listener) => {
      const query = window.matchMedia?.(PHONE);
      query?.addEventListener("change", listener);
      return () => query?.removeEventListener("change", listener);
    },
    () => window.matchMedia?.(PHONE).matches ?? false,
  );
}

/** Width of an element, px; null until it is known. */
function useWidth(): [(element: HTMLElement | null) => void, number | null] {
  const [width, setWidth] = useState<number | null>(null);
  const observer = useRef<ResizeObserver | null>(null);
  const [measure] = useState(() => (element: HTMLElement | null) => {
    observer.current?.disconnect();
    if (!element || typeof ResizeObserver === "undefined") return;
    setWidth(element.clientWidth);
    observer.current = new ResizeObserver(() => setWidth(element.clientWidth));
    observer.current.observe(element);
  });
  return [measure, width];
}

export function DayEntry({
  view,
  store,
  way,
  onView,
}: {
  view: DayGridView;
  store: DraftStore;
  /** Other days and crews. */
  way: ReactNode;
  onView: (view: DayGridView) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const entry = useDayEntry(view, store, onView);
  const { draft, found, behind, dispatch } = entry;
  const isPhone = useIsPhone();
  const [measure, width] = useWidth();
  const [focus, setFocus] = useState<GridFocus>({ row: 0, column: 0, wish: 0 });
  const [said, setSaid] = useState("");
  const [asksReason, setAsksReason] = useState<number | null>(null);
  const [openEnds, setOpenEnds] = useState<{ names: string[]; reason: string | null } | null>(null);
  const [choosing, setChoosing] = useState<string | null>(null);
  const [isConfirming, setIsConfirming] = useState(false);

  const gridRows = useMemo(() => new Map(view.rows.map((row) => [row.worker.id, row])), [view]);
  const columns = useMemo(
    () => gridColumns(view.tasks, draft.addedTaskIds),
    [view.tasks, draft.addedTaskIds],
  );
  const { governing } = rulesOf(view);
  const bases = useMemo(() => outsideBases(i18n, locale, governing), [i18n, locale, governing]);
  const layout = useMemo(
    () => gridLayout(columns, width, bases.length > 0),
    [columns, width, bases],
  );
  const { isWide } = layout;
  const frame = useMemo((): GridFrame => {
    const names = new Map(view.tasks.map(({ id, name }) => [id, name]));
    return {
      columns,
      isWide,
      strip: stripFrame(i18n, locale, governing.key, governing.version),
      outsideBases: bases,
      showsUncertainty:
        view.settings.usesUncertainty &&
        governing.criteria.some(({ usesUncertainty }) => usesUncertainty),
      taskName: (id) => names.get(id) ?? "",
    };
  }, [columns, isWide, view, governing, bases, i18n, locale]);

  const states = found.map((one) => {
    const gridRow = gridRows.get(one.row.workerId);
    return gridRow ? rowState(one, gridRow, behind.includes(one.row.workerId)) : "saved";
  });
  const { settled, waiting } = countRows(draft, view);
  const onlyFilledIn = found.filter((one) => {
    const gridRow = gridRows.get(one.row.workerId);
    return gridRow !== undefined && isOnlyFilledIn(one, one.row, gridRow);
  });
  const nameOf = (workerId: string) => gridRows.get(workerId)?.worker.name ?? "";
  const goTo = (place: Place) => setFocus(({ wish }) => ({ ...place, wish: wish + 1 }));

  async function save(reason: string | null, confirmsOpenEnd = false) {
    setSaid("");
    const outcome = await entry.save({ reason, confirmsOpenEnd });
    if (typeof outcome === "object" && "openEnds" in outcome) {
      setOpenEnds({ names: outcome.openEnds.map(nameOf), reason });
    } else if (outcome === "reason") {
      setAsksReason(
        found.filter(({ row }) => row.base !== null && row.isTouched && !row.isAbsent).length,
      );
    } else if (outcome === "nothing") {
      const first = states.findIndex(isWaiting);
      setSaid(
        first === -1
          ? i18n.t("Everything is saved already.")
          : i18n.t("Nothing is ready to be saved: confirm rows, or mend what is marked."),
      );
      if (first !== -1) goTo({ row: first, column: suspectColumn(first) });
    } else if (outcome !== "failed") {
      setSaid(savedWords(outcome.saved, outcome.waiting));
      setChoosing(outcome.conflict);
      if (outcome.firstWaiting !== null) {
        goTo({ row: outcome.firstWaiting, column: suspectColumn(outcome.firstWaiting) });
      }
    }
  }

  function savedWords(saved: number, rest: number): string {
    const first = i18n.t("{count, plural, one {# saved} other {# saved}}", { count: saved });
    return rest === 0
      ? i18n.t("{saved}, nothing waits.", { saved: first })
      : i18n.t("{saved}, {count, plural, one {# waits} other {# wait}}.", {
          saved: first,
          count: rest,
        });
  }

  function suspectColumn(row: number): number {
    const one = found[row];
    const cell = [...(one?.problems ?? []), ...(one?.questions ?? [])][0]?.cell;
    return Math.max(
      0,
      columns.findIndex((column) => column.cell !== null && column.cell === cell),
    );
  }

  function copyLast() {
    const rows = view.rows.filter((row) => {
      const own = draft.rows.find(({ workerId }) => workerId === row.worker.id);
      return row.lastShift && own && !own.isTouched && !own.isConfirmed && !isSettled(own, row);
    });
    dispatch({ type: "copy-last", rows });
    setSaid(
      i18n.t(
        "{count, plural, one {# row has the last shift, to be looked at.} other {# rows have the last shift, to be looked at.}} Readings are not copied.",
        { count: rows.length },
      ),
    );
  }

  function onMend(workerId: string, action: MendAction) {
    const row = found.findIndex((one) => one.row.workerId === workerId);
    const one = found[row];
    if (!one) return;
    if (action === "choose") {
      setChoosing(workerId);
      return;
    }
    mend(one, action);
    // What was pressed is gone with what was wrong.
    goTo({ row, column: suspectColumn(row) });
  }

  function mend(one: RowEvaluation, action: Exclude<MendAction, "choose">) {
    const { workerId } = one.row;
    switch (action) {
      case "lengthen":
        dispatch({
          type: "set-cells",
          changes: [{ workerId, cell: "length", value: cellOf(one.sumMin, "typed") }],
        });
        return;
      case "first-hour":
      case "second-hour": {
        const whichHour = action === "first-hour" ? "first" : "second";
        dispatch({ type: "patch-row", workerId, patch: { whichHour } });
        return;
      }
      case "whole-day":
        dispatch({ type: "patch-row", workerId, patch: { confirmsWholeDay: true } });
        return;
      case "it-is-right": {
        const answered = [...one.row.answered, ...one.questions.map(({ key }) => key)];
        dispatch({ type: "patch-row", workerId, patch: { answered } });
      }
    }
  }

  function onChosen(row: RowDraft) {
    dispatch({ type: "restore-row", row });
    const next = behind.find((workerId) => workerId !== row.workerId) ?? null;
    setChoosing(next);
    if (next === null && row.isTouched) void save(null);
  }

  const focused = found[focus.row];
  const focusedRow = focused && gridRows.get(focused.row.workerId);
  const named = waitingSentences(i18n, states);
  const usual = i18n.t("Usual shift {start}, {length}.", {
    start: view.crew.usualStart,
    length: formatDuration(view.crew.usualLengthMin, locale),
  });
  const choosingRow = draft.rows.find(({ workerId }) => workerId === choosing);
  const choosingGridRow = choosing === null ? undefined : gridRows.get(choosing);
  const worn = wornWords();

  function wornWords(): string {
    const loud = (task: DayGridView["tasks"][number]) =>
      task.zone !== "none" ||
      (task.level !== null && task.level.levelDb >= view.settings.wearFromDb);
    const quiet = columns.flatMap(({ task }) => (task && !loud(task) ? task.name : []));
    const first = i18n.t("Worn in tasks of {level} dB and more", {
      level: view.settings.wearFromDb,
    });
    return quiet.length === 0
      ? `${first}.`
      : i18n.t("{first}; {tasks} without.", { first, tasks: quiet.join(", ") });
  }

  return (
    <div className="day-entry">
      <PageHead
        way={way}
        title={`${view.crew.name}, ${formatDay(view.date, locale)}`}
        lead={
          <>
            <b>
              {i18n.t("{settled} saved, {waiting, plural, one {# waits} other {# wait}}", {
                settled,
                waiting,
              })}
              {named.length > 0 ? ":" : "."}
            </b>{" "}
            {named.length > 0 && `${named.join(", ")}. `}
            {usual}
          </>
        }
        actions={
          <>
            <Button onClick={copyLast}>{i18n.t("Copy last shift")}</Button>
            <ButtonLink to={paths.imports}>{i18n.t("Import CSV")}</ButtonLink>
            <Button kind="primary" isBusy={entry.isSaving} onClick={() => void save(null)}>
              {i18n.t("Save")}
            </Button>
          </>
        }
      />
      {entry.restoredAt !== null && (
        <p className="draft-note">
          {i18n.t("What you typed until {time} is here and not saved yet.", {
            time: formatTime(entry.restoredAt, view.crew.timeZone),
          })}{" "}
          <TextButton onClick={entry.dropDraft}>{i18n.t("Drop it")}</TextButton>
        </p>
      )}
      {behind.length > 0 && (
        <p className="draft-note">
          {i18n.t(
            "{count, plural, one {# of your rows was saved by somebody else meanwhile.} other {# of your rows were saved by somebody else meanwhile.}}",
            { count: behind.length },
          )}{" "}
          <TextButton onClick={() => setChoosing(behind[0] ?? null)}>
            {i18n.t("Choose what stands")}
          </TextButton>
        </p>
      )}
      {entry.saveError !== null && !entry.isSaving && (
        <Banner
          title={i18n.t("Not saved.")}
          action={
            <TextButton onClick={() => void save(null)}>{i18n.t("Send it again")}</TextButton>
          }
        >
          {problemText(i18n, entry.saveError)}
        </Banner>
      )}
      <div ref={measure}>
        {isPhone ? (
          <WorkerByWorker
            entry={entry}
            frame={frame}
            states={states}
            at={focus.row}
            onAt={(row) => setFocus((known) => ({ ...known, row }))}
            onMend={onMend}
          />
        ) : (
          <DayGrid
            entry={entry}
            frame={frame}
            layout={layout}
            label={i18n.t("Day of {crew}, {date}", {
              crew: view.crew.name,
              date: formatDay(view.date, locale),
            })}
            focus={focus}
            onFocus={goTo}
            onSave={() => void save(null)}
            onSay={setSaid}
            onMend={onMend}
          />
        )}
      </div>
      <p className="sr-only" id="day-grid-keys">
        {i18n.t(
          "Arrows move, typing writes, Enter goes down, Tab right. Escape and then Tab leaves the grid.",
        )}
      </p>
      <div className="grid-foot">
        <div className="grid-foot-words">
          {view.notices && (
            <EntryNotices
              notices={view.notices}
              timeZone={view.crew.timeZone}
              onChange={(notices: Notices) => onView({ ...view, notices })}
            />
          )}
          <Status>{said}</Status>
          {onlyFilledIn.length > 0 && (
            <TextButton onClick={() => setIsConfirming(true)}>
              {onlyFilledIn.length === waiting
                ? i18n.t(
                    "{count, plural, one {Confirm # row as filled in} other {Confirm # rows as filled in}}",
                    { count: onlyFilledIn.length },
                  )
                : i18n.t("Confirm the other {count} as filled in", {
                    count: onlyFilledIn.length,
                  })}
            </TextButton>
          )}
          {focused && focusedRow?.lastShift && !isPhone && (
            <TextButton onClick={() => dispatch({ type: "copy-last", rows: [focusedRow] })}>
              {i18n.t("Copy the last shift of row {row}", { row: focus.row + 1 })}
            </TextButton>
          )}
        </div>
        {!isPhone && <MarkLegend />}
      </div>
      {!isPhone && focused && focusedRow && (
        <div className="grid-below">
          <RowPanel
            entry={entry}
            found={focused}
            gridRow={focusedRow}
            index={focus.row}
            frame={frame}
          />
          <KeyLegend />
        </div>
      )}
      <Folio>
        {i18n.t("{title}, version {version}. Preview by the same engine as the record.", {
          title: i18n._(governing.title),
          version: governing.version,
        })}{" "}
        {worn}
      </Folio>

      {asksReason !== null && (
        <ReasonDialog
          count={Math.max(1, asksReason)}
          onClose={() => setAsksReason(null)}
          onReason={(reason) => {
            setAsksReason(null);
            void save(reason);
          }}
        />
      )}
      {openEnds && (
        <OpenEndsDialog
          names={openEnds.names}
          onClose={() => setOpenEnds(null)}
          onConfirm={() => {
            setOpenEnds(null);
            void save(openEnds.reason, true);
          }}
        />
      )}
      {choosingRow && choosingGridRow && (
        <ConflictDialog
          key={choosingRow.workerId}
          entry={entry}
          row={choosingRow}
          gridRow={choosingGridRow}
          columns={columns}
          taskName={frame.taskName}
          onChosen={onChosen}
          onClose={() => setChoosing(null)}
        />
      )}
      {isConfirming && (
        <ConfirmDialog
          rows={onlyFilledIn}
          nameOf={nameOf}
          onClose={() => setIsConfirming(false)}
          onConfirm={() => {
            setIsConfirming(false);
            const answered = Object.fromEntries(
              onlyFilledIn.map(({ row, questions }) => [
                row.workerId,
                questions.map(({ key }) => key),
              ]),
            );
            const workerIds = onlyFilledIn.map(({ row }) => row.workerId);
            dispatch({ type: "confirm-rows", workerIds, answered });
          }}
        />
      )}
    </div>
  );
}

function MarkLegend() {
  const { i18n } = useLingui();
  return (
    <p className="mark-legend" aria-hidden="true">
      <span>
        <span className="mono filled-in">130</span> {i18n.t("filled in, not looked at yet")}
      </span>
      <span>
        <span className="mono">130</span> {i18n.t("typed or confirmed")}
      </span>
      <span>
        <b className="mono">4</b> {i18n.t("row not saved yet")}
      </span>
    </p>
  );
}
