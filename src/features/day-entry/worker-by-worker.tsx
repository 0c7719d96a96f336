import { useLingui } from "@lingui/react";
import { Button } from "../../components/button";
import { AtEarFigure, OutsideFigure } from "../../components/day-figures";
import { DropStrip } from "../../components/drop-strip";
import { Verdict } from "../../components/verdict";
import { useLocale } from "../../lib/i18n";
import { type GridFrame, type MendAction, previewFigures, stripProps } from "./grid-row";
import { RowForm } from "./row-form";
import { WorkedOut } from "./row-panel";
import { isWaiting, type RowState } from "./row-state";
import { rowStateWord } from "./row-words";
import type { DayEntryState } from "./use-day-entry";
import { problemWords, questionWords } from "./words";

/** On a phone: one worker at a time, every field under its label, what is worked out beneath. */
export function WorkerByWorker({
  entry,
  frame,
  states,
  at,
  onAt,
  onMend,
}: {
  entry: DayEntryState;
  frame: GridFrame;
  states: readonly RowState[];
  at: number;
  onAt: (row: number) => void;
  onMend: (workerId: string, action: MendAction) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const found = entry.found[at];
  const gridRow = entry.view.rows.find(({ worker }) => worker.id === found?.row.workerId);
  if (!found || !gridRow) return null;
  const { row, problems, questions } = found;
  const figures = previewFigures(found, frame);
  const { workerId } = row;
  const last = entry.found.length - 1;
  const confirm = () => {
    const answered = { [workerId]: questions.map(({ key }) => key) };
    entry.dispatch({ type: "confirm-rows", workerIds: [workerId], answered });
    if (at < last) onAt(at + 1);
  };
  return (
    <section className="one-worker" aria-labelledby="one-worker">
      <div className="one-worker-head">
        <select
          className="input"
          id="one-worker"
          aria-label={i18n.t("Worker")}
          value={at}
          onChange={(event) => onAt(Number(event.target.value))}
        >
          {entry.view.rows.map(({ worker }, index) => (
            <option key={worker.id} value={index}>
              {index + 1} {worker.name}, {rowStateWord(i18n, states[index] ?? "saved", false)}
            </option>
          ))}
        </select>
        <div className="one-worker-steps">
          <Button aria-disabled={at === 0} onClick={() => onAt(Math.max(0, at - 1))}>
            {i18n.t("Previous")}
          </Button>
          <Button aria-disabled={at === last} onClick={() => onAt(Math.min(last, at + 1))}>
            {i18n.t("Next")}
          </Button>
        </div>
      </div>
      {row.isAbsent ? (
        <p className="row-words">{i18n.t("Absent all day, no exposure recorded.")}</p>
      ) : (
        <>
          <div className="one-worker-result">
            {figures ? <AtEarFigure figures={figures} /> : <Verdict verdict="not-assessed" />}
            <DropStrip {...stripProps(found, frame)} variant="list" widthPx={160} k={1.5} />
            {figures && <OutsideFigure figures={figures} />}
          </div>
          {problems.map((problem) => {
            const { title, mend } = problemWords(i18n, problem, locale, frame.taskName);
            return (
              <p key={`${problem.kind} ${problem.cell}`} className="below-line" role="alert">
                <span className="reversed">{title}</span> {mend}
              </p>
            );
          })}
          {problems.some(({ kind }) => kind === "time-twice") && (
            <div className="form-actions">
              <Button onClick={() => onMend(workerId, "first-hour")}>{i18n.t("The first")}</Button>
              <Button onClick={() => onMend(workerId, "second-hour")}>
                {i18n.t("The second")}
              </Button>
            </div>
          )}
          {problems.some(({ kind }) => kind === "whole-day") && (
            <Button onClick={() => onMend(workerId, "whole-day")}>{i18n.t("Yes, 24 hours")}</Button>
          )}
          {questions.map((question) => {
            const { title, mend } = questionWords(i18n, question, locale);
            return (
              <p key={question.key} className="below-line">
                <b className="asked">{title}</b> {mend}
              </p>
            );
          })}
          <RowForm
            key={workerId}
            entry={entry}
            found={found}
            gridRow={gridRow}
            columns={frame.columns}
            taskName={frame.taskName}
            isWhole
          />
          <WorkedOut found={found} entry={entry} frame={frame} />
        </>
      )}
      <div className="one-worker-actions">
        {!row.isAbsent && problems.length === 0 && isWaiting(states[at] ?? "saved") && (
          <Button kind="primary" onClick={confirm}>
            {i18n.t("It was so")}
          </Button>
        )}
        <Button
          onClick={() => entry.dispatch({ type: "set-absent", workerId, isAbsent: !row.isAbsent })}
        >
          {row.isAbsent ? i18n.t("Not absent") : i18n.t("Absent")}
        </Button>
        {gridRow.lastShift && !row.isAbsent && (
          <Button onClick={() => entry.dispatch({ type: "copy-last", rows: [gridRow] })}>
            {i18n.t("Copy last shift")}
          </Button>
        )}
      </div>
    </section>
  );
}
