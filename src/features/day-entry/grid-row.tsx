import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { type InputHTMLAttributes, memo, type ReactNode } from "react";
import { formatMinutes } from "../../../shared/format/duration";
import { formatLevel, formatLevelChange, formatLimit } from "../../../shared/format/level";
import { editNumber } from "../../../shared/format/number";
import type { Locale } from "../../../shared/i18n/index";
import type { DayFigures } from "../../../shared/schemas/finding";
import type { GridRow as GridRowView } from "../../../shared/schemas/shift";
import {
  AtEarFigure,
  gravestOutside,
  isBoundReason,
  OutsideFigure,
  OutsideLines,
  outsideWords,
} from "../../components/day-figures";
import { DropStrip, type DropStripProps, StripGround } from "../../components/drop-strip";
import { LevelFigure } from "../../components/level-figure";
import { TextButton } from "../../components/link";
import { ProtectorWord } from "../../components/protector-word";
import { stripLabel } from "../../components/strip-label";
import { type StripFrame, stripOfDay } from "../../components/strip-of-day";
import { Verdict } from "../../components/verdict";
import { useLocale } from "../../lib/i18n";
import type { BesideReading } from "./beside-reading";
import {
  type Cell,
  editText,
  numberIn,
  type ReadingValue,
  readingIn,
  unaccountedIn,
} from "./cells";
import type { CellId, GridColumn } from "./columns";
import { enteredReadings } from "./draft";
import type { RowEvaluation, RowProblem, RowQuestion } from "./evaluate-rows";
import type { RowState } from "./row-state";
import { rowStateWord } from "./row-words";
import {
  columnName,
  problemWords,
  questionWords,
  unaccountedText,
  unaccountedWords,
} from "./words";

export const STRIP_WIDTH_PX = 160;
const STRIP_K = 1.25;

/** What is the same in every row. */
export interface GridFrame {
  readonly columns: readonly GridColumn[];
  readonly isWide: boolean;
  readonly strip: StripFrame;
  /** What the figures without protection are, where the rule tells several apart: a line of the cell each. */
  readonly outsideBases: readonly string[];
  /** The uncertainty counts in the verdicts of this site and its rules: only then it stands beside a figure. */
  readonly showsUncertainty: boolean;
  readonly taskName: (id: string) => string;
}

export type MendAction =
  | "lengthen"
  | "it-is-right"
  | "first-hour"
  | "second-hour"
  | "whole-day"
  | "choose";

export interface GridRowProps {
  readonly found: RowEvaluation;
  readonly gridRow: GridRowView;
  readonly index: number;
  readonly state: RowState;
  readonly frame: GridFrame;
  /** The column that has the focus, in this row. */
  readonly focusColumn: number | null;
  readonly selectedFrom: number | null;
  readonly selectedTo: number | null;
  /** What is being written in the cell that has the focus. */
  readonly editing: string | null;
  readonly onMend: (workerId: string, action: MendAction) => void;
  readonly onUndoAbsent: (workerId: string) => void;
}

export const GridRow = memo(function GridRow(props: GridRowProps) {
  const { i18n } = useLingui();
  const { found, gridRow, index, state, frame, focusColumn, editing } = props;
  const { row, problems, questions } = found;
  const { worker } = gridRow;
  const below = [...problems, ...questions];
  const isBelow = below.length > 0 || state === "behind";
  const rowSpan = isBelow ? 2 : undefined;
  const isTyping = editing !== null;
  const typed = frame.columns.filter(({ id }) => id !== "result");
  const resultColumn = frame.columns.length - 1;
  const className = [
    isBelow ? "has-below" : "",
    focusColumn === null ? "" : "is-focus",
    state === "saved" ? "is-saved" : "",
  ].join(" ");
  return (
    <>
      <tr className={className} aria-rowindex={index + 3}>
        <th scope="row" className="who" rowSpan={rowSpan}>
          <span className="who-number" aria-hidden="true">
            {index + 1}
          </span>
          <span className="two-lines">
            <span className="who-name" title={worker.name}>
              {worker.name}
            </span>{" "}
            <span className="who-state">
              {worker.employeeNumber}{" "}
              <span className={state === "saved" ? undefined : "is-waiting"}>
                {rowStateWord(i18n, state, isTyping)}
              </span>
              {gridRow.isLoan && ` ${i18n.t("on loan")}`}
            </span>
          </span>
        </th>
        {row.isAbsent ? (
          <AbsentCell {...props} span={typed.length} />
        ) : (
          typed.map((column, at) => <GridCell key={column.id} column={column} at={at} {...props} />)
        )}
        <ResultCells {...props} rowSpan={rowSpan} at={resultColumn} />
      </tr>
      {isBelow && (
        <tr className="below">
          <td colSpan={typed.length}>
            <Below {...props} problems={problems} questions={questions} />
          </td>
          <td className="strip-cell">
            <Ground frame={frame} />
          </td>
        </tr>
      )}
    </>
  );
});

function place(
  { index, focusColumn, selectedFrom, selectedTo }: GridRowProps,
  at: number,
): React.TdHTMLAttributes<HTMLTableCellElement> & { "data-row": number; "data-column": number } {
  const isSelected =
    selectedFrom !== null && selectedTo !== null && at >= selectedFrom && at <= selectedTo;
  return {
    role: "gridcell",
    "data-row": index,
    "data-column": at,
    "aria-colindex": at + 2,
    "aria-selected": isSelected || undefined,
    tabIndex: focusColumn === at ? 0 : -1,
  };
}

function AbsentCell(props: GridRowProps & { span: number }) {
  const { i18n } = useLingui();
  const { found, focusColumn, span, onUndoAbsent } = props;
  const at = focusColumn !== null && focusColumn < span ? focusColumn : 0;
  return (
    <td {...place(props, at)} colSpan={span} className="absent">
      <b>{i18n.t("Absent")}</b> {i18n.t("all day, no exposure recorded")}{" "}
      <TextButton tabIndex={-1} onClick={() => onUndoAbsent(found.row.workerId)}>
        {i18n.t("Undo")}
      </TextButton>
    </td>
  );
}

function GridCell(props: GridRowProps & { column: GridColumn; at: number }) {
  const { i18n } = useLingui();
  const { column, at, found, gridRow, focusColumn, editing } = props;
  const { row, problems, questions } = found;
  const cell = column.cell ? row.cells[column.cell] : undefined;
  const isEditing = focusColumn === at && editing !== null && column.cell !== null;
  const isFilled = cell?.mark === "filled" && !row.isConfirmed;
  const isSuspect = [...problems, ...questions].some((one) => one.cell === column.cell);
  const isSumWrong = column.id === "sum" && problems.some(({ kind }) => kind === "does-not-add-up");
  const className = [
    "cell",
    `is-${column.task ? "task" : column.id}`,
    isFilled || column.cell === null ? "is-bare" : "",
    isSuspect && column.cell ? "is-suspect" : "",
    isSumWrong ? "is-wrong" : "",
    isEditing ? "is-editing" : "",
  ].join(" ");
  return (
    <td {...place(props, at)} className={className} aria-invalid={isSuspect || undefined}>
      {isEditing ? (
        <CellEditor
          value={editing}
          aria-label={`${columnName(i18n, column)}, ${gridRow.worker.name}`}
        />
      ) : (
        <CellContent {...props} cell={cell} isFilled={isFilled} />
      )}
    </td>
  );
}

/** The grid listens to its keys and to what is typed; see DayGrid. */
function CellEditor(props: InputHTMLAttributes<HTMLInputElement>) {
  return (
    <input
      {...props}
      className="cell-editor"
      autoComplete="off"
      spellCheck={false}
      data-cell-editor=""
      onChange={ignore}
    />
  );
}
const ignore = () => undefined;

function Filled({ isFilled, children }: { isFilled: boolean; children: ReactNode }) {
  const { i18n } = useLingui();
  if (!isFilled) return children;
  return (
    <>
      <span className="filled-in">{children}</span>
      <span className="sr-only"> {i18n.t("filled in")}</span>
    </>
  );
}

/** With its blank a sum from here on is wider than the column at full size. */
const FIVE_FIGURES_MIN = 1000;

function CellContent({
  column,
  cell,
  isFilled,
  found,
  gridRow,
  frame,
}: GridRowProps & { column: GridColumn; cell: Cell | undefined; isFilled: boolean }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  switch (column.id) {
    case "unaccounted":
      return <UnaccountedContent found={found} cell={cell} isFilled={isFilled} locale={locale} />;
    case "sum":
      return (
        <span
          className={
            found.sumMin === 0
              ? "is-zero"
              : found.sumMin < FIVE_FIGURES_MIN
                ? "sum"
                : "sum is-small"
          }
        >
          {formatMinutes(found.sumMin, locale)}
        </span>
      );
    case "reading":
      return (
        <ReadingContent
          found={found}
          gridRow={gridRow}
          cell={cell}
          locale={locale}
          isWide={frame.isWide}
        />
      );
    case "protector":
      return <ProtectorContent found={found} />;
    case "worn":
      return <WornContent found={found} cell={cell} isFilled={isFilled} locale={locale} />;
    default: {
      const text = editText(cell, locale, unaccountedWords(i18n));
      return text === "" ? null : <Filled isFilled={isFilled}>{text}</Filled>;
    }
  }
}

interface ContentProps {
  found: RowEvaluation;
  cell: Cell | undefined;
  isFilled?: boolean;
  locale: Locale;
}

function UnaccountedContent({ found, cell, isFilled = false, locale }: ContentProps) {
  const { i18n } = useLingui();
  if (cell?.text) return cell.text;
  const minutes = found.unaccountedMin;
  if (minutes === null) return null;
  const isNone = Math.abs(minutes) < 0.5;
  const how = unaccountedIn(cell);
  return (
    <span className="two-lines">
      <span className={isNone ? "is-zero" : undefined}>
        <Filled isFilled={isFilled && !isNone}>{formatMinutes(minutes, locale)}</Filled>
      </span>
      {minutes >= 0.5 && <span className="under">{unaccountedText(i18n, how, locale)}</span>}
    </span>
  );
}

function ReadingContent({
  found,
  gridRow,
  cell,
  locale,
  isWide,
}: ContentProps & { gridRow: GridRowView; isWide: boolean }) {
  const { i18n } = useLingui();
  const value = readingIn(cell);
  if (cell?.text) return cell.text;
  const count = enteredReadings(found.row, gridRow).length;
  const others = value ? count - 1 : count;
  if (count === 0) return null;
  return (
    <span className="two-lines">
      <span>
        {others > 0 && (
          <span className="reading-count">
            {value ? i18n.t("1 of {count}", { count }) : i18n.t("{count} others", { count })}{" "}
          </span>
        )}
        {value?.kind === "level" && formatLevel(value.levelDb, locale)}
        {value?.kind === "dose" && `${editNumber(value.dosePct, locale)} %`}
      </span>
      {found.evaluation && (
        <span className="under">
          {besideWords(i18n, locale, found.besideReading, isWide, value)}
        </span>
      )}
    </span>
  );
}

/** Levels nearer than this show the same figure, dB. */
const SAME_DB = 0.05;

/** What the tasks give beside a reading that governs, or that it does not. */
function besideWords(
  i18n: I18n,
  locale: Locale,
  beside: BesideReading | null,
  isWide: boolean,
  typed: ReadingValue | null,
): string | null {
  if (!beside) return isWide ? i18n.t("only evidence") : i18n.t("evidence");
  const { readingDb, tasksDb, tasksBound, gapDb } = beside;
  if (tasksDb === null) return null;
  const level = formatLevel(tasksDb, locale, tasksBound);
  if (tasksBound !== "exact" || gapDb === null) return i18n.t("tasks {level}", { level });
  const gap = formatLevelChange(gapDb, locale);
  if (!isWide) return i18n.t("tasks {gap}", { gap: formatLevelChange(-gapDb, locale) });
  // The gap is between levels over eight hours: where the reading’s is another than was typed, both are named.
  return typed?.kind === "level" &&
    readingDb !== null &&
    Math.abs(readingDb - typed.levelDb) >= SAME_DB
    ? i18n.t("8 h: {reading}", { reading: formatLevel(readingDb, locale) })
    : i18n.t("tasks {level}, {gap}", { level, gap });
}

function ProtectorContent({ found }: { found: RowEvaluation }) {
  const { i18n } = useLingui();
  const [first, ...others] = found.protectors;
  if (!first) return <span className="not-assessed">{i18n.t("none")}</span>;
  return (
    <span className={others.length === 1 ? "two-lines has-second" : "two-lines"}>
      <span className="clip">{first.name}</span>
      {others.map(({ name, taskNames }) => (
        <ForTasks key={name} name={name} tasks={taskNames.join(", ")} />
      ))}
    </span>
  );
}

/** The protector first: it is what the column is about, and narrow columns cut the end. */
function ForTasks({ name, tasks }: { name: string; tasks: string }) {
  const words = `${name}: ${tasks}`;
  return (
    <span className="under clip" title={words}>
      {words}
    </span>
  );
}

function WornContent({ found, cell, isFilled = false, locale }: ContentProps) {
  const { i18n } = useLingui();
  if (cell?.text) return cell.text;
  if (found.protectors.length === 0) return null;
  const own = (Object.keys(found.row.cells) as CellId[]).flatMap((id) => {
    const sharePct = id.startsWith("worn:") ? numberIn(found.row.cells[id]) : null;
    return sharePct === null ? [] : [{ id, sharePct }];
  });
  const shared = numberIn(cell);
  const lowest = own.sort((a, b) => a.sharePct - b.sharePct)[0];
  if (lowest && (shared === null || lowest.sharePct < shared)) {
    const isOwnFilled = found.row.cells[lowest.id]?.mark === "filled" && !found.row.isConfirmed;
    return (
      <span className="two-lines">
        <Filled isFilled={isOwnFilled}>{editNumber(lowest.sharePct, locale)}</Filled>
        <span className="under clip">
          {own.length > 1 ? i18n.t("several") : i18n.t("one task")}
        </span>
      </span>
    );
  }
  if (shared === null) return null;
  return (
    <span className="two-lines">
      <Filled isFilled={isFilled}>{editNumber(shared, locale)}</Filled>
      <span className={shared < 100 ? "under clip" : "sr-only"}>{i18n.t("all tasks")}</span>
    </span>
  );
}

/** A row's day in the shape in which a stored one is shown; null where nothing is worked out. */
export function previewFigures(found: RowEvaluation, frame: GridFrame): DayFigures | null {
  if (!found.summary) return null;
  const { decidingTaskId: _, dosePct: __, doseBound: ___, ...figures } = found.summary;
  const uncertaintyDb = frame.showsUncertainty ? figures.uncertaintyDb : null;
  return { ...figures, uncertaintyDb, resultId: "", origin: "computed" };
}

const NOTHING: Omit<DropStripProps, "limits" | "targetBand" | "hasProtector"> = {
  outsideDb: null,
  outsideUDb: null,
  outsideBound: "exact",
  atEarDb: null,
  atEarBound: "exact",
  atEarUDb: null,
  atEarActiveDb: null,
  atEarAsWorkedDb: null,
  whileWornDb: null,
  isExpected: false,
  word: null,
  verdict: null,
};

export function stripProps(found: RowEvaluation, frame: GridFrame): DropStripProps {
  const figures = previewFigures(found, frame);
  if (figures) return stripOfDay(figures, frame.strip);
  const { limits, targetBand } = frame.strip;
  return { ...NOTHING, limits, targetBand, hasProtector: "unknown" };
}

function ResultCells(props: GridRowProps & { rowSpan: number | undefined; at: number }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { found, frame, rowSpan, at } = props;
  const { row } = found;
  const figures = previewFigures(found, frame);
  const strip = stripProps(found, frame);
  const label = row.isAbsent
    ? i18n.t("Absent")
    : figures
      ? stripLabel(i18n, {
          ...strip,
          outsideWords: outsideWords(i18n, locale, figures),
        })
      : found.hasOtherShift
        ? i18n.t("Worked out with the other shift of that day, when it is saved.")
        : i18n.t("Not assessed");
  return (
    <>
      {frame.isWide && (
        <td className="at-ear" rowSpan={rowSpan} aria-hidden="true">
          {row.isAbsent ? (
            "–"
          ) : !figures ? (
            <Verdict verdict="not-assessed" />
          ) : frame.strip.hasLimitAtEar ? (
            <AtEarFigure figures={figures} />
          ) : (
            <LevelFigure
              levelDb={figures.atEarDb}
              uncertaintyDb={figures.atEarBound === "exact" ? figures.uncertaintyDb : null}
              bound={figures.atEarBound}
              isStrong={figures.atEarDb !== null}
            />
          )}
        </td>
      )}
      <td className="strip-cell">
        {row.isAbsent ? (
          <Ground frame={frame} />
        ) : (
          <DropStrip {...strip} widthPx={STRIP_WIDTH_PX} k={STRIP_K} isHidden />
        )}
      </td>
      {frame.isWide && (
        <td className="outside" rowSpan={rowSpan} aria-hidden="true">
          {!figures || row.isAbsent ? (
            "–"
          ) : frame.outsideBases.length > 0 ? (
            <OutsideLines figures={figures} />
          ) : (
            <OutsideFigure figures={figures} />
          )}
        </td>
      )}
      <td {...place(props, at)} className="word" rowSpan={rowSpan} aria-label={label}>
        <span className="word-lines">
          {!frame.isWide && !row.isAbsent && <NarrowVerdict figures={figures} frame={frame} />}
          <Word {...props} />
        </span>
      </td>
    </>
  );
}

function Ground({ frame }: { frame: GridFrame }) {
  const { limits, targetBand } = frame.strip;
  return <StripGround limits={limits} targetBand={targetBand} widthPx={STRIP_WIDTH_PX} />;
}

function NarrowVerdict({ figures, frame }: { figures: DayFigures | null; frame: GridFrame }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (!figures) return <Verdict verdict="not-assessed" />;
  if (frame.strip.hasLimitAtEar) return <Verdict verdict={figures.verdictAtEar} />;
  const { verdict, words } = gravestOutside(i18n, locale, figures);
  return (
    <Verdict verdict={verdict} isQuiet>
      {words}
    </Verdict>
  );
}

function Word({ found, frame }: GridRowProps) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { row, summary, isBare, hasOtherShift } = found;
  if (row.isAbsent) return frame.isWide ? "–" : null;
  if (hasOtherShift && found.problems.length === 0) {
    return <span className="beneath">{i18n.t("with another shift")}</span>;
  }
  if (!summary) return frame.isWide ? "–" : null;
  if (summary.hasProtector === "no") {
    if (isBare) return <span className="is-fault">{i18n.t("No protector")}</span>;
    return frame.isWide ? <span className="beneath">{i18n.t("none needed")}</span> : null;
  }
  // Beside a verdict that is not assessed the words would stand twice.
  if (summary.word === null && !frame.isWide) return null;
  return (
    <ProtectorWord
      word={summary.word}
      isOpen={isBoundReason(summary.reason)}
      beneath={
        frame.isWide && summary.decidingTaskName && summary.whileWornDb !== null ? (
          <span className="deciding" title={summary.decidingTaskName}>
            <span className="clip">{summary.decidingTaskName}</span>{" "}
            <span className="mono">
              {formatLevel(summary.whileWornDb, locale, summary.whileWornBound)}
            </span>
          </span>
        ) : undefined
      }
    />
  );
}

/** What is wrong or asked, each with what to do about it. */
function Below({
  found,
  frame,
  problems,
  questions,
  state,
  onMend,
}: GridRowProps & {
  problems: readonly RowProblem[];
  questions: readonly RowQuestion[];
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { workerId } = found.row;
  const act = (action: MendAction, words: string) => (
    <TextButton key={action} tabIndex={-1} onClick={() => onMend(workerId, action)}>
      {words}
    </TextButton>
  );
  return (
    <>
      {state === "behind" && (
        <p className="below-line">
          <span className="reversed">{i18n.t("Someone saved this shift before you.")}</span>
          {i18n.t("Nothing of yours is lost.")} {act("choose", i18n.t("Choose what stands"))}
        </p>
      )}
      {problems.map((problem) => {
        const { title, mend } = problemWords(i18n, problem, locale, frame.taskName);
        return (
          <p className="below-line" key={`${problem.kind} ${problem.cell} ${mend}`}>
            <span className="reversed">{title}</span>
            {mend}{" "}
            {problem.kind === "does-not-add-up" &&
              Number.isInteger(problem.sumMin) &&
              problem.sumMin <= 1440 &&
              act(
                "lengthen",
                i18n.t("Make the shift {minutes} min", {
                  minutes: formatLimit(problem.sumMin, locale),
                }),
              )}
            {problem.kind === "time-twice" && (
              <>
                {act("first-hour", i18n.t("The first"))} {act("second-hour", i18n.t("The second"))}
              </>
            )}
            {problem.kind === "whole-day" && act("whole-day", i18n.t("Yes, 24 hours"))}
          </p>
        );
      })}
      {questions.map((question) => {
        const { title, mend } = questionWords(i18n, question, locale);
        return (
          <p className="below-line" key={question.key}>
            <b className="asked">{title}</b>
            {mend} {act("it-is-right", i18n.t("It is right"))}
          </p>
        );
      })}
    </>
  );
}
