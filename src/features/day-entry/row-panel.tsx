import { useLingui } from "@lingui/react";
import { useMemo } from "react";
import { asReason, reasonText } from "../../../shared/findings/reasons";
import { formatBoundedDose } from "../../../shared/format/dose";
import { formatLevel, formatUncertainty } from "../../../shared/format/level";
import type { GridRow } from "../../../shared/schemas/shift";
import { outsideWords } from "../../components/day-figures";
import { ShareBar } from "../../components/share-bar";
import { useLocale } from "../../lib/i18n";
import type { RowEvaluation } from "./evaluate-rows";
import { FAR_OFF_DB, withoutProtector } from "./evaluate-rows";
import { type GridFrame, previewFigures } from "./grid-row";
import { RowForm } from "./row-form";
import type { DayEntryState } from "./use-day-entry";

const BARE_MIN = 10;

/** The row in focus: where its level comes from, and what the protector makes of it. */
export function RowPanel({
  entry,
  found,
  gridRow,
  index,
  frame,
}: {
  entry: DayEntryState;
  found: RowEvaluation;
  gridRow: GridRow;
  index: number;
  frame: GridFrame;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { summary, row } = found;
  const name = gridRow.worker.name;
  const level = (levelDb: number | null) => formatLevel(levelDb, locale);
  return (
    <section className="row-panel" aria-labelledby="row-panel-title">
      <h2 id="row-panel-title">
        {summary?.outsideDb != null
          ? i18n.t("Row {row}, {name}: where the {level} dB come from", {
              row: index + 1,
              name,
              level: level(summary.outsideDb),
            })
          : i18n.t("Row {row}, {name}", { row: index + 1, name })}
      </h2>
      {row.isAbsent ? (
        <p className="row-words">{i18n.t("Absent all day, no exposure recorded.")}</p>
      ) : (
        <>
          <WorkedOut found={found} entry={entry} frame={frame} />
          <details className="row-more is-row">
            <summary id="row-details">{i18n.t("More on this row")}</summary>
            <RowForm
              key={row.workerId}
              entry={entry}
              found={found}
              gridRow={gridRow}
              columns={frame.columns}
              taskName={frame.taskName}
              isWhole={false}
            />
          </details>
        </>
      )}
    </section>
  );
}

/** Figures, shares and sentences of an evaluated row. */
export function WorkedOut({
  found,
  entry,
  frame,
}: {
  found: RowEvaluation;
  entry: DayEntryState;
  frame: GridFrame;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { summary, evaluation, input } = found;
  const bare = useMemo(() => withoutProtector(found, entry.view, BARE_MIN), [found, entry.view]);
  if (!summary || !evaluation || !input) {
    return (
      <p className="row-words">
        <i>{i18n.t("Not assessed")}</i>{" "}
        {found.hasOtherShift && found.problems.length === 0
          ? i18n.t("Worked out with the other shift of that day, when it is saved.")
          : i18n.t("Nothing is worked out until the row is mended.")}
      </p>
    );
  }
  const names = new Map(
    input.shifts.flatMap(({ tasks }) => tasks.map(({ id, name }) => [id, name])),
  );
  const shares = Object.entries(evaluation.sharesPct)
    .map(([id, sharePct]) => ({ label: names.get(id) ?? "", sharePct }))
    .sort((a, b) => b.sharePct - a.sharePct);
  const isWorn = summary.hasProtector === "yes";
  const isFarOff =
    isWorn && summary.word !== null && Math.abs(found.besideReading?.gapDb ?? 0) >= FAR_OFF_DB;
  const reason = asReason(summary.reason);
  return (
    <>
      {shares.length > 0 && <ShareBar shares={shares} />}
      {!frame.isWide && <Figures found={found} frame={frame} />}
      <p className="row-words">
        {frame.isWide && isWorn && summary.atEarDb !== null && summary.atEarActiveDb === null && (
          <>
            {i18n.t("At the ear")}{" "}
            <b className="mono">{formatLevel(summary.atEarDb, locale, summary.atEarBound)}</b>
            {". "}
          </>
        )}
        {isWorn && summary.atEarDb !== null && summary.atEarActiveDb !== null && (
          <>
            {i18n.t("At the ear with the active part off")}{" "}
            <b className="mono">
              {formatLevel(summary.atEarOffDb ?? summary.atEarDb, locale, summary.atEarBound)}
            </b>
            , {i18n.t("with it on")}{" "}
            <b className="mono">{formatLevel(summary.atEarActiveDb, locale, summary.atEarBound)}</b>
            {". "}
          </>
        )}
        {bare && (
          <>
            {i18n.t("Ten minutes without the protector in {task} would make it", {
              task: bare.taskName,
            })}{" "}
            <b className="mono">{formatLevel(bare.atEarDb, locale, bare.atEarBound)}</b>
            {". "}
          </>
        )}
        {summary.dosePct !== null && (
          <>
            {i18n.t("Dose without protection")}{" "}
            <b className="mono">{formatBoundedDose(summary.dosePct, summary.doseBound, locale)}</b>
            {". "}
          </>
        )}
        {isFarOff && i18n.t("The protector’s word rests on the tasks, not on the reading. ")}
        {reason !== null && i18n.t("Open because {reason}.", { reason: reasonText(i18n, reason) })}
      </p>
    </>
  );
}

function Figures({ found, frame }: { found: RowEvaluation; frame: GridFrame }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const figures = previewFigures(found, frame);
  if (!figures) return null;
  const uncertainty = formatUncertainty(figures.uncertaintyDb, locale);
  const plusMinus = uncertainty !== "" && (
    <>
      {" "}
      <span className="figure-u">{uncertainty}</span>
    </>
  );
  return (
    <p className="row-words">
      {i18n.t("At the ear")}{" "}
      <b className="mono">{formatLevel(figures.atEarDb, locale, figures.atEarBound)}</b>
      {figures.atEarBound === "exact" && plusMinus}, {i18n.t("without protection")}{" "}
      <b className="mono">{formatLevel(figures.outsideDb, locale, figures.outsideBound)}</b>
      {figures.outsideBound === "exact" && plusMinus} ({outsideWords(i18n, locale, figures)}).
    </p>
  );
}

/** The keys, for those who come to type. */
export function KeyLegend() {
  const { i18n } = useLingui();
  const keys: readonly (readonly [string, string])[] = [
    ["Enter", i18n.t("down")],
    ["Tab", i18n.t("right")],
    ["Ctrl D", i18n.t("fill down")],
    ["F2", i18n.t("edit")],
    ["Esc", i18n.t("restore")],
    ["a", i18n.t("absent")],
    ["Shift Enter", i18n.t("confirm row")],
    ["F8", i18n.t("next problem")],
    ["Ctrl Enter", i18n.t("save")],
    ["Ctrl Z", i18n.t("take back")],
  ];
  return (
    <dl className="key-legend">
      {keys.map(([key, words]) => (
        <div key={key}>
          <dt>
            <kbd>{key}</kbd>
          </dt>
          <dd>{words}</dd>
        </div>
      ))}
    </dl>
  );
}
