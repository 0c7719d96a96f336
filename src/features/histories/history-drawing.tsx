import { useLingui } from "@lingui/react";
import { useEffect, useMemo, useRef, useState } from "react";
import type { HistoryView } from "../../../shared/schemas/history";
import { Button } from "../../components/button";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import type { Choice } from "../../components/form";
import { TextButton } from "../../components/link";
import { Status } from "../../components/status";
import { useLocale } from "../../lib/i18n";
import { clockText, type HistoryClock } from "./history-clock";
import { HistoryLanes } from "./history-lanes";
import type { LaneProps } from "./history-picture";
import type { Span } from "./history-span";
import { type FormStretch, StretchForm } from "./history-stretch-form";
import {
  type Drawn,
  freePlace,
  nextTask,
  type Placed,
  type StretchKind,
} from "./history-stretches";
import { lengthText, stretchName } from "./history-words";
import { type LeftOutAnswer, LeftOutForm } from "./left-out-form";
import type { Drawing } from "./use-drawing";

/** As long as a stretch is at first where nothing says how long. */
const FIRST_LENGTH_S = 600;

/** What drawing needs wherever it is shown: the open form, the word about what just happened, and the focus after it. */
export function useStretchEditing({
  history,
  clock,
  drawing,
  taskNames,
}: {
  history: HistoryView;
  clock: HistoryClock;
  drawing: Drawing;
  taskNames: Readonly<Record<string, string>>;
}) {
  const { i18n } = useLingui();
  const { drawn } = drawing;
  const { lengthS } = clock;
  const [open, setOpen] = useState<FormStretch | null>(null);
  const [word, setWord] = useState("");
  const focusKey = useRef<string | null>(null);
  const nameOf = (one: Drawn) => stretchName(i18n, one, taskNames);

  useEffect(() => {
    const key = focusKey.current;
    if (key === null || open) return;
    focusKey.current = null;
    document.querySelector<HTMLElement>(`[data-bracket="${key}"]`)?.focus();
  });

  function tell({ stoppedBy, side }: Placed) {
    if (!stoppedBy) {
      setWord("");
      return;
    }
    const { fromS, toS } = stoppedBy;
    const seconds = toS - fromS < 120;
    setWord(
      side === "after"
        ? i18n.t("{name} begins there, at {time}.", {
            name: nameOf(stoppedBy),
            time: clockText(clock, fromS, seconds),
          })
        : i18n.t("{name} ends there, at {time}.", {
            name: nameOf(stoppedBy),
            time: clockText(clock, toS, seconds),
          }),
    );
  }

  const openOf = (key: string) => {
    const one = drawn.find((stretch) => stretch.key === key);
    if (!one) return;
    setOpen({
      kind: one.kind,
      taskId: one.kind === "task" ? one.taskId : null,
      reason: one.kind === "left-out" ? one.reason : null,
      fromS: one.fromS,
      toS: one.toS,
      key,
    });
  };

  function openNew(kind: StretchKind, place: Span | null) {
    const task = kind === "task" ? nextTask(history.tasks, drawn) : null;
    const wantedS = task ? task.durationMin * 60 : FIRST_LENGTH_S;
    const free = place ?? freePlace(drawn, kind, wantedS, lengthS);
    if (!free) {
      setWord(i18n.t("There is no room left: the whole history lies under brackets."));
      return;
    }
    setWord("");
    setOpen({ kind, taskId: task?.id ?? null, reason: null, ...free, key: null });
  }

  return {
    open,
    word,
    close: () => {
      focusKey.current = open?.key ?? null;
      setOpen(null);
    },
    openOf,
    openNew,
    onChange: (placed: Placed, isDone: boolean) => {
      drawing.change(placed.drawn, isDone);
      tell(placed);
    },
    remove: (key: string) => {
      const one = drawn.find((stretch) => stretch.key === key);
      if (!one) return;
      drawing.change(drawn.filter((stretch) => stretch.key !== key));
      setOpen(null);
      setWord(i18n.t("{name} is taken away.", { name: nameOf(one) }));
    },
    set: (stretch: FormStretch) => {
      const key = stretch.key ?? drawing.newKey();
      const { fromS, toS } = stretch;
      const next: Drawn =
        stretch.kind === "task"
          ? { kind: "task", taskId: stretch.taskId ?? "", fromS, toS, key }
          : { kind: "left-out", reason: (stretch.reason ?? "").trim(), fromS, toS, key };
      drawing.change([...drawn.filter((one) => one.key !== key), next]);
      focusKey.current = key;
      setOpen(null);
      setWord("");
    },
  };
}

type Editing = ReturnType<typeof useStretchEditing>;

export function DrawingLanes({
  history,
  clock,
  drawing,
  editing,
  taskNames,
  span,
  widthPx,
  rightPx,
}: LaneProps & {
  history: HistoryView;
  clock: HistoryClock;
  drawing: Drawing;
  editing: Editing;
  taskNames: Readonly<Record<string, string>>;
}) {
  return (
    <HistoryLanes
      span={span}
      clock={clock}
      intervalS={history.intervalMs / 1000}
      drawn={drawing.drawn}
      taskNames={taskNames}
      canChange={history.can.change === true && !history.isVoid}
      openKey={editing.open?.key ?? null}
      pending={editing.open?.key === null ? editing.open : null}
      word={editing.word}
      widthPx={widthPx}
      rightPx={rightPx}
      onChange={editing.onChange}
      onOpen={editing.openOf}
      onRemove={editing.remove}
      onDraw={editing.openNew}
    />
  );
}

/** The brackets as a list, with what the lanes do by hand: add, change, remove, take back, save. */
export function StretchList({
  history,
  clock,
  drawing,
  editing,
  tasks,
  taskNames,
  leftOut,
  onSave,
  isSaving,
}: {
  history: HistoryView;
  clock: HistoryClock;
  drawing: Drawing;
  editing: Editing;
  tasks: readonly Choice[];
  taskNames: Readonly<Record<string, string>>;
  leftOut: LeftOutAnswer;
  onSave: () => void;
  isSaving: boolean;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const canChange = history.can.change === true && !history.isVoid;
  const { drawn } = drawing;
  const isChanged = drawing.isChanged || leftOut.isChanged;
  const rows = drawn.toSorted((a, b) => a.fromS - b.fromS || a.toS - b.toS);
  // A table makes its cells anew where its columns are others, and a button under the hand would be gone.
  const latest = useRef({ editing, taskNames });
  latest.current = { editing, taskNames };
  const columns = useMemo(
    (): DataColumn<Drawn>[] => [
      {
        id: "what",
        head: i18n.t("Bracket"),
        isRowHead: true,
        cell: (one) =>
          one.kind === "task" ? (
            stretchName(i18n, one, latest.current.taskNames)
          ) : (
            <>
              <i className="hatch-word">{i18n.t("Left out")}</i>{" "}
              {i18n.t("because: {reason}", { reason: one.reason })}
            </>
          ),
      },
      {
        id: "from",
        head: i18n.t("From"),
        kind: "figure",
        cell: ({ fromS, toS }) => clockText(clock, fromS, toS - fromS < 120),
      },
      {
        id: "to",
        head: i18n.t("To"),
        kind: "figure",
        cell: ({ fromS, toS }) => clockText(clock, toS, toS - fromS < 120),
      },
      {
        id: "minutes",
        head: i18n.t("Length"),
        kind: "figure",
        hidesOnPhone: true,
        cell: ({ fromS, toS }) => lengthText(i18n, toS - fromS, locale),
      },
      ...(canChange
        ? [
            {
              id: "acts",
              head: <span className="sr-only">{i18n.t("Change")}</span>,
              kind: "right",
              cell: (one) => {
                const name = stretchName(i18n, one, latest.current.taskNames);
                return (
                  <span className="row-acts">
                    <TextButton
                      aria-label={i18n.t("Change {name}", { name })}
                      onClick={() => latest.current.editing.openOf(one.key)}
                    >
                      {i18n.t("Change")}
                    </TextButton>{" "}
                    <TextButton
                      aria-label={i18n.t("Remove {name}", { name })}
                      onClick={() => latest.current.editing.remove(one.key)}
                    >
                      {i18n.t("Remove")}
                    </TextButton>
                  </span>
                );
              },
            } satisfies DataColumn<Drawn>,
          ]
        : []),
    ],
    [i18n, locale, clock, canChange],
  );
  // Saved or thrown away, the button that did it is gone: the keyboard goes on at those that stay.
  const acts = useRef<HTMLDivElement>(null);
  const wasChanged = useRef(isChanged);
  useEffect(() => {
    if (wasChanged.current && !isChanged && document.activeElement === document.body)
      acts.current?.querySelector("button")?.focus();
    wasChanged.current = isChanged;
  }, [isChanged]);
  return (
    <>
      {canChange && (
        <div ref={acts} className="stretch-acts no-print">
          <Button onClick={() => editing.openNew("task", null)}>{i18n.t("Add a task")}</Button>
          <Button onClick={() => editing.openNew("left-out", null)}>
            {i18n.t("Leave out a stretch")}
          </Button>
          {drawing.canUndo && <Button onClick={drawing.undo}>{i18n.t("Take back")}</Button>}
          {isChanged && (
            <>
              <Button kind="primary" isBusy={isSaving} onClick={onSave}>
                {i18n.t("Save the brackets")}
              </Button>
              <TextButton
                onClick={() => {
                  drawing.reset(history);
                  leftOut.form.reset();
                }}
              >
                {i18n.t("Throw my changes away")}
              </TextButton>
            </>
          )}
          <Status>
            {editing.word ||
              (isChanged
                ? drawing.wasRestored
                  ? i18n.t("Not saved: drawn here before, and kept on this device.")
                  : i18n.t("Not saved yet; the figures below are of what is saved.")
                : "")}
          </Status>
        </div>
      )}
      {editing.open && (
        <StretchForm
          key={editing.open.key ?? `${editing.open.kind} ${editing.open.fromS} ${editing.open.toS}`}
          stretch={editing.open}
          clock={clock}
          drawn={drawn}
          tasks={tasks}
          taskNames={taskNames}
          onSet={editing.set}
          onRemove={
            editing.open.key === null ? null : () => editing.remove(editing.open?.key ?? "")
          }
          onClose={editing.close}
        />
      )}
      {canChange && leftOut.isAsked && <LeftOutForm answer={leftOut} onSave={onSave} />}
      <DataTable
        caption={i18n.t("Brackets, and what is left out")}
        columns={columns}
        rows={rows}
        rowKey={({ key }) => key}
        stacksOnPhone
        empty={
          <Empty title={i18n.t("Nothing is drawn under this history yet.")}>
            {canChange &&
              i18n.t("Drag along the lane of tasks under the picture, or add a task here.")}
          </Empty>
        }
      />
    </>
  );
}
