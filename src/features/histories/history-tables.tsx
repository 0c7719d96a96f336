import { useLingui } from "@lingui/react";
import { type ReactNode, useEffect, useRef, useState } from "react";
import { formatBoundedDose, formatDose, formatShare } from "../../../shared/format/dose";
import { formatMinutes } from "../../../shared/format/duration";
import { formatLevel, formatLevelChange } from "../../../shared/format/level";
import { formatNumber, MINUS } from "../../../shared/format/number";
import type { HistoryAnalysis, HistoryView } from "../../../shared/schemas/history";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { useLocale } from "../../lib/i18n";
import type { HistoryClock } from "./history-clock";
import { boundWord, criterionText, lengthText, rangeText } from "./history-words";

interface TaskRow {
  readonly key: string;
  readonly name: string;
  readonly durationS: number;
  readonly shiftMin: number | null;
  readonly laeqDb: number | null;
  readonly dosePct: number | null;
  readonly sharePct: number | null;
  readonly isRest: boolean;
}

function taskRows(
  { tasks, rest }: HistoryAnalysis,
  shift: HistoryView["tasks"],
  restName: string,
): TaskRow[] {
  const rows: TaskRow[] = tasks.map((task) => ({
    ...task,
    key: task.taskId,
    name: task.taskName,
    shiftMin: shift.find(({ id }) => id === task.taskId)?.durationMin ?? null,
    isRest: false,
  }));
  if (!rest || rest.durationS < 0.5) return rows;
  return [...rows, { ...rest, key: "rest", name: restName, shiftMin: null, isRest: true }];
}

/** What each task took and gave. */
export function TasksTable({
  history,
  analysis,
}: {
  history: HistoryView;
  analysis: HistoryAnalysis;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const rows = taskRows(analysis, history.tasks, i18n.t("Under no bracket"));
  const columns: DataColumn<TaskRow>[] = [
    {
      id: "task",
      head: i18n.t("Task"),
      isRowHead: true,
      cell: ({ name, isRest }) => (isRest ? <i className="ink-2">{name}</i> : name),
    },
    {
      id: "minutes",
      head: i18n.t("Counted"),
      unit: "min",
      kind: "figure",
      cell: ({ durationS }) => formatMinutes(durationS / 60, locale),
    },
    {
      id: "shift",
      head: i18n.t("In the shift"),
      unit: "min",
      kind: "figure",
      hidesOnPhone: true,
      cell: ({ shiftMin }) => formatMinutes(shiftMin, locale),
    },
    {
      id: "level",
      head: i18n.t("LAeq"),
      unit: "dB",
      kind: "figure",
      cell: ({ laeqDb }) => formatLevel(laeqDb, locale),
    },
    {
      id: "dose",
      head: i18n.t("Dose"),
      kind: "figure",
      cell: ({ dosePct }) => formatDose(dosePct, locale),
    },
    {
      id: "share",
      head: i18n.t("Share"),
      kind: "figure",
      cell: ({ sharePct }) => formatShare(sharePct, locale),
    },
  ];
  return (
    <div className="figures-frame">
      <DataTable
        caption={i18n.t("Levels and doses by task")}
        columns={columns}
        rows={rows}
        rowKey={({ key }) => key}
        stacksOnPhone
        empty={<Empty title={i18n.t("No task has a bracket yet.")} />}
      />
    </div>
  );
}

interface CompareRow {
  readonly id: string;
  readonly name: ReactNode;
  readonly note?: string;
  readonly counted: string;
  readonly everything: string;
  readonly difference: string;
}

/** Results with what is left out and without it, side by side. */
export function CompareTable({ analysis }: { analysis: HistoryAnalysis }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { counted, everything } = analysis;
  const hasLeftOut = everything.durationS - counted.durationS > 1e-6;
  const level = (
    id: string,
    name: ReactNode,
    with_: number | null | undefined,
    without: number | null | undefined,
  ): CompareRow[] =>
    with_ == null && without == null
      ? []
      : [
          {
            id,
            name,
            counted: formatLevel(with_ ?? null, locale),
            everything: formatLevel(without ?? null, locale),
            difference: formatLevelChange(
              with_ == null || without == null ? null : with_ - without,
              locale,
            ),
          },
        ];
  const doses = counted.readings.map((reading, index): CompareRow => {
    const other = everything.readings.find(
      ({ label, settings }) =>
        label === reading.label && JSON.stringify(settings) === JSON.stringify(reading.settings),
    );
    const change =
      reading.dosePct == null || other?.dosePct == null ? null : reading.dosePct - other.dosePct;
    return {
      id: `dose ${index}`,
      name: i18n.t("Dose, {criterion}", { criterion: criterionText(i18n, reading, locale) }),
      note: reading.bound === "exact" ? undefined : boundWord(i18n, reading.bound),
      counted: formatBoundedDose(reading.dosePct, reading.bound, locale),
      everything: other ? formatBoundedDose(other.dosePct, other.bound, locale) : "–",
      difference: change === null ? "–" : `${change > 0 ? "+" : ""}${formatDose(change, locale)}`,
    };
  });
  const percentile = (share: string) =>
    level(
      `l${share}`,
      i18n.t("L{share}, reached for {share} % of the time", { share }),
      counted.percentilesDb[share],
      everything.percentilesDb[share],
    );
  const rows: CompareRow[] = [
    {
      id: "time",
      name: i18n.t("Time"),
      counted: lengthText(i18n, counted.durationS, locale),
      everything: lengthText(i18n, everything.durationS, locale),
      difference: hasLeftOut
        ? `${MINUS}${lengthText(i18n, everything.durationS - counted.durationS, locale)}`
        : "–",
    },
    ...level("laeq", i18n.t("LAeq, dB"), counted.laeqDb, everything.laeqDb),
    ...doses,
    ...level("lceq", i18n.t("LCeq, dB"), counted.lceqDb, everything.lceqDb),
    ...level("max", i18n.t("LASmax, dB"), counted.lasMaxDb, everything.lasMaxDb),
    ...level(
      "peak",
      i18n.t("Peak, dB({weighting})", { weighting: counted.peak?.weighting ?? "C" }),
      counted.peak?.levelDb,
      everything.peak?.levelDb,
    ),
    ...["10", "50", "90", "95"].flatMap(percentile),
  ];
  const figure = (id: "counted" | "everything" | "difference", head: string) =>
    ({ id, head, kind: "figure", cell: (row) => row[id] }) satisfies DataColumn<CompareRow>;
  const columns: DataColumn<CompareRow>[] = [
    {
      id: "name",
      head: i18n.t("Result"),
      isRowHead: true,
      cell: ({ name, note }) => (
        <>
          {name}
          {note && <span className="beneath"> {note}</span>}
        </>
      ),
    },
    figure("counted", i18n.t("Counted")),
    ...(hasLeftOut
      ? [
          figure("everything", i18n.t("With what is left out")),
          figure("difference", i18n.t("Difference")),
        ]
      : []),
  ];
  return (
    <div className="figures-frame">
      <DataTable
        caption={i18n.t("Results with and without what is left out")}
        columns={columns}
        rows={rows}
        rowKey={({ id }) => id}
        stacksOnPhone={hasLeftOut}
      />
      {!hasLeftOut && <p className="field-note">{i18n.t("Nothing is left out.")}</p>}
    </div>
  );
}

const PICTURE_HEIGHT = 96;

/** How the levels spread over classes of 1 dB: a tick each, and the same as a table. */
export function Distribution({ analysis }: { analysis: HistoryAnalysis }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { distribution } = analysis;
  const frame = useRef<HTMLDivElement>(null);
  const [width, setWidth] = useState(560);
  useEffect(() => {
    const element = frame.current;
    if (!element || typeof ResizeObserver === "undefined") return;
    const observer = new ResizeObserver(([entry]) => {
      if (entry && entry.contentRect.width > 0) setWidth(Math.round(entry.contentRect.width));
    });
    observer.observe(element);
    return () => observer.disconnect();
  }, []);
  const first = distribution[0];
  const last = distribution.at(-1);
  if (!first || !last)
    return <Empty title={i18n.t("No level counts, so that there is nothing to spread.")} />;
  const lowDb = Math.floor(first.fromDb / 10) * 10;
  const highDb = Math.ceil((last.fromDb + 1) / 10) * 10;
  const mostPct = Math.max(...distribution.map(({ sharePct }) => sharePct));
  const x = (db: number) => 14 + ((db - lowDb) * (width - 28)) / (highDb - lowDb);
  const most = distribution.find(({ sharePct }) => sharePct === mostPct) ?? first;
  const tens = Array.from({ length: (highDb - lowDb) / 10 + 1 }, (_, step) => lowDb + 10 * step);
  const label = i18n.t(
    "Levels from {low} to {high} dB; most of the time, {share}, at {most} to {next} dB.",
    {
      low: formatNumber(first.fromDb, 0, locale),
      high: formatNumber(last.fromDb + 1, 0, locale),
      share: formatShare(mostPct, locale),
      most: formatNumber(most.fromDb, 0, locale),
      next: formatNumber(most.fromDb + 1, 0, locale),
    },
  );
  const mostX = x(most.fromDb + 0.5);
  const isRight = mostX > width * 0.7;
  const columns: DataColumn<(typeof distribution)[number]>[] = [
    {
      id: "from",
      head: i18n.t("Level"),
      unit: "dB",
      isRowHead: true,
      cell: ({ fromDb }) =>
        i18n.t("{from} to {to}", {
          from: formatNumber(fromDb, 0, locale),
          to: formatNumber(fromDb + 1, 0, locale),
        }),
    },
    {
      id: "share",
      head: i18n.t("Share of the time"),
      unit: "%",
      kind: "figure",
      cell: ({ sharePct }) => formatNumber(sharePct, 1, locale),
    },
  ];
  return (
    <div className="distribution-frame" ref={frame}>
      <svg
        className="distribution"
        viewBox={`0 0 ${width} ${PICTURE_HEIGHT + 26}`}
        role="img"
        aria-label={label}
      >
        {distribution.map(({ fromDb, sharePct }) => (
          <line
            key={fromDb}
            className="distribution-tick"
            x1={x(fromDb + 0.5)}
            x2={x(fromDb + 0.5)}
            y1={PICTURE_HEIGHT}
            y2={PICTURE_HEIGHT - (sharePct / mostPct) * (PICTURE_HEIGHT - 18)}
          />
        ))}
        <text
          x={mostX + (isRight ? -8 : 8)}
          y={12}
          textAnchor={isRight ? "end" : "start"}
          className="label-ink"
        >
          {i18n.t("{share} at {level} dB", {
            share: formatShare(mostPct, locale),
            level: formatNumber(most.fromDb, 0, locale),
          })}
        </text>
        <line
          className="distribution-base"
          x1={0}
          x2={width}
          y1={PICTURE_HEIGHT}
          y2={PICTURE_HEIGHT}
        />
        {tens.map((db) => (
          <text key={db} x={x(db)} y={PICTURE_HEIGHT + 19} textAnchor="middle">
            {formatNumber(db, 0, locale)}
          </text>
        ))}
      </svg>
      <details className="no-print">
        <summary>{i18n.t("As a table")}</summary>
        <DataTable
          caption={i18n.t("Share of the time by level")}
          columns={columns}
          rows={distribution}
          rowKey={({ fromDb }) => String(fromDb)}
        />
      </details>
    </div>
  );
}

type Quarter = HistoryAnalysis["quarters"][number];

/** The picture as a table: what each quarter of an hour had, and the dose so far. */
export function QuartersTable({
  analysis,
  clock,
}: {
  analysis: HistoryAnalysis;
  clock: HistoryClock;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const columns: DataColumn<Quarter>[] = [
    {
      id: "time",
      head: i18n.t("Time"),
      isRowHead: true,
      cell: (quarter) => <span className="mono quarter-range">{rangeText(clock, quarter)}</span>,
    },
    {
      id: "laeq",
      head: i18n.t("LAeq"),
      unit: "dB",
      kind: "figure",
      cell: ({ laeq }) => formatLevel(laeq?.levelDb ?? null, locale, laeq?.bound),
    },
    {
      id: "max",
      head: i18n.t("LASmax"),
      unit: "dB",
      kind: "figure",
      hidesOnPhone: true,
      cell: ({ slowMax }) => formatLevel(slowMax?.levelDb ?? null, locale, slowMax?.bound),
    },
    ...analysis.runningDose.map(
      (dose, place): DataColumn<Quarter> => ({
        id: `dose ${place}`,
        head: criterionText(i18n, dose, locale),
        unit: i18n.t("dose so far"),
        kind: "figure",
        hidesOnPhone: place > 0,
        cell: ({ dosePct }) => formatBoundedDose(dosePct[place] ?? null, dose.bound, locale),
      }),
    ),
  ];
  return (
    <DataTable
      caption={i18n.t("Levels and doses so far, by quarters of an hour")}
      columns={columns}
      rows={analysis.quarters}
      rowKey={({ fromS }) => String(fromS)}
    />
  );
}
