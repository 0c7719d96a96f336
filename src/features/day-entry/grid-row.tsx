import { useLingui } from "@lingui/react";
import { type InputHTMLAttributes, memo, type ReactNode } from "react";
import { formatMinutes } from "../../../shared/format/duration";
import { formatLevel, formatLevelChange, formatLimit } from "../../../shared/format/level";
import { editNumber } from "../../../shared/format/number";
import type { Locale } from "../../../shared/i18n/index";
import type { GridRow as GridRowView } from "../../../shared/schemas/shift";
import {
  DropStrip,
  type DropStripProps,
  StripGround,
  stripLabel,
} from "../../components/drop-strip";
import type { StripLimit, TargetBand } from "../../components/drop-strip-geometry";
import { LevelFigure } from "../../components/level-figure";
import { TextButton } from "../../components/link";
import { ProtectorWord } from "../../components/protector-word";
import { Verdict, VerdictShape } from "../../components/verdict";
import { type Cell, editText, numberIn, readingIn, unaccountedIn } from "./cells";
import type { CellId, GridColumn } from "./columns";
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
  readonly limits: StripLimit[];
  readonly targetBand: TargetBand | null;
  readonly hasLimitAtEar: boolean;
  readonly showsUncertainty: boolean;
  readonly outsideWords: (found: RowEvaluation) => string;
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
            <span className="who-name">{worker.name}</span>
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
    <td
      {...place(props, at)}
      className={className}
      aria-invalid={isSuspect || undefined}
      aria-readonly={column.cell === null || undefined}
    >
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

function CellContent({
  column,
  cell,
  isFilled,
  found,
}: GridRowProps & { column: GridColumn; cell: Cell | undefined; isFilled: boolean }) {
  const { i18n } = useLingui();
  const locale: Locale = i18n.locale === "de" ? "de" : "en";
  switch (column.id) {
    case "unaccounted":
      return <UnaccountedContent found={found} cell={cell} isFilled={isFilled} locale={locale} />;
    case "sum":
      return (
        <span className={found.sumMin === 0 ? "is-zero" : "sum"}>
          {formatMinutes(found.sumMin, locale)}
        </span>
      );
    case "reading":
      return <ReadingContent found={found} cell={cell} locale={locale} />;
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

function ReadingContent({ found, cell, locale }: ContentProps) {
  const { i18n } = useLingui();
  const value = readingIn(cell);
  if (cell?.text) return cell.text;
  if (!value) return null;
  const { evaluation } = found;
  const governs = evaluation !== null && evaluation.tasksDb !== null;
  return (
    <span className="two-lines">
      <span>
        {value.kind === "level"
          ? formatLevel(value.levelDb, locale)
          : `${editNumber(value.dosePct, locale)} %`}
      </span>
      {governs && (
        <span className="under">
          {i18n.t("tasks {level}, {gap}", {
            level: formatLevel(evaluation.tasksDb, locale),
            gap: formatLevelChange(evaluation.readingGapDb, locale),
          })}
        </span>
      )}
      {!governs && evaluation && <span className="under">{i18n.t("does not govern")}</span>}
    </span>
  );
}

function ProtectorContent({ found }: { found: RowEvaluation }) {
  const { i18n } = useLingui();
  const [first, ...others] = found.protectors;
  if (!first) return <span className="not-assessed">{i18n.t("none")}</span>;
  return (
    <span className="two-lines">
      <span className="clip">{first.name}</span>
      {others.map(({ name, taskNames }) => (
        <span key={name} className="under clip">
          {name}, {taskNames.join(", ")}
        </span>
      ))}
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
          {own.length > 1 ? i18n.t("lowest of {count}", { count: own.length }) : i18n.t("one task")}
        </span>
      </span>
    );
  }
  if (shared === null) return null;
  return (
    <span className="two-lines">
      <Filled isFilled={isFilled}>{editNumber(shared, locale)}</Filled>
      {shared < 100 && <span className="under">{i18n.t("whole shift")}</span>}
      {shared >= 100 && <span className="sr-only">{i18n.t("whole shift")}</span>}
    </span>
  );
}

export function stripProps(found: RowEvaluation, frame: GridFrame): DropStripProps {
  const { summary, protectors } = found;
  const uncertaintyDb = frame.showsUncertainty ? (summary?.uncertaintyDb ?? null) : null;
  return {
    outsideDb: summary?.outsideDb ?? null,
    outsideUDb: uncertaintyDb,
    outsideBound: summary?.outsideBound ?? "exact",
    atEarDb: summary?.atEarDb ?? null,
    atEarUDb: frame.hasLimitAtEar ? uncertaintyDb : null,
    atEarActiveDb: summary?.atEarActiveDb ?? null,
    atEarAsWorkedDb: summary?.atEarAsWorkedDb ?? null,
    whileWornDb: summary?.whileWornDb ?? null,
    limits: frame.limits,
    targetBand: frame.targetBand,
    isExpected: false,
    hasProtector: summary?.hasProtector ?? (protectors.length > 0 ? "unknown" : "no"),
    word: summary?.word ?? null,
    verdict: summary && frame.hasLimitAtEar ? summary.verdictAtEar : null,
    decidingTask: summary?.decidingTaskName ?? undefined,
    outsideWords: summary ? frame.outsideWords(found) : undefined,
  };
}

function ResultCells(props: GridRowProps & { rowSpan: number | undefined; at: number }) {
  const { i18n } = useLingui();
  const { found, frame, rowSpan, at } = props;
  const { row, summary } = found;
  const strip = stripProps(found, frame);
  const label = row.isAbsent
    ? i18n.t("Absent")
    : summary
      ? stripLabel(i18n, strip)
      : found.hasOtherShift
        ? i18n.t("Worked out with the other shift of that day, when it is saved.")
        : i18n.t("Not assessed");
  const stripCell = (
    <td className="strip-cell" rowSpan={rowSpan}>
      {row.isAbsent ? (
        <StripGround limits={frame.limits} targetBand={frame.targetBand} widthPx={STRIP_WIDTH_PX} />
      ) : (
        <DropStrip {...strip} widthPx={STRIP_WIDTH_PX} k={STRIP_K} isHidden />
      )}
    </td>
  );
  return (
    <>
      {frame.isWide && (
        <td className="at-ear" rowSpan={rowSpan} aria-hidden="true">
          <AtEar {...props} />
        </td>
      )}
      {stripCell}
      {frame.isWide && (
        <td className="outside" rowSpan={rowSpan} aria-hidden="true">
          <Outside {...props} />
        </td>
      )}
      <td {...place(props, at)} className="word" rowSpan={rowSpan} aria-label={label}>
        {!frame.isWide && <NarrowVerdict {...props} />}
        <Word {...props} />
      </td>
    </>
  );
}

function AtEar({ found, frame }: GridRowProps) {
  const { i18n } = useLingui();
  const { row, summary } = found;
  if (row.isAbsent) return "–";
  if (!summary) return <Verdict verdict="not-assessed" />;
  if (summary.atEarDb === null && frame.hasLimitAtEar) {
    return <Verdict verdict={summary.verdictAtEar} />;
  }
  return (
    <LevelFigure
      levelDb={summary.atEarDb}
      uncertaintyDb={frame.showsUncertainty ? summary.uncertaintyDb : null}
      isStrong
    >
      {frame.hasLimitAtEar ? (
        <Verdict verdict={summary.verdictAtEar} />
      ) : (
        <span className="beneath">{i18n.t("no limit at the ear")}</span>
      )}
    </LevelFigure>
  );
}

function Outside({ found, frame }: GridRowProps) {
  const { row, summary } = found;
  if (row.isAbsent || !summary) return "–";
  return (
    <LevelFigure
      levelDb={summary.outsideDb}
      bound={summary.outsideBound}
      uncertaintyDb={frame.showsUncertainty ? summary.uncertaintyDb : null}
    >
      <span className="verdict is-quiet">
        <VerdictShape verdict={summary.verdictOutside} />
        <span className="verdict-word">{frame.outsideWords(found)}</span>
      </span>
    </LevelFigure>
  );
}

function NarrowVerdict({ found, frame }: GridRowProps) {
  const { row, summary } = found;
  if (row.isAbsent) return null;
  if (!summary) return <Verdict verdict="not-assessed" />;
  if (frame.hasLimitAtEar) return <Verdict verdict={summary.verdictAtEar} />;
  return (
    <Verdict verdict={summary.verdictOutside} isQuiet>
      {frame.outsideWords(found)}
    </Verdict>
  );
}

function Word({ found, frame }: GridRowProps) {
  const { i18n } = useLingui();
  const locale: Locale = i18n.locale === "de" ? "de" : "en";
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
  return (
    <ProtectorWord
      word={summary.word}
      beneath={
        summary.decidingTaskName && summary.whileWornDb !== null ? (
          <>
            {summary.decidingTaskName}{" "}
            <span className="mono">{formatLevel(summary.whileWornDb, locale)}</span>
          </>
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
  const locale: Locale = i18n.locale === "de" ? "de" : "en";
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
