import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { type ReactNode, useMemo } from "react";
import { isOverdue } from "../../../shared/findings/overdue";
import { findingStateWord, findingWord } from "../../../shared/findings/words";
import { formatShortDate } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import type { Locale } from "../../../shared/i18n/index";
import { isolate } from "../../../shared/i18n/isolate";
import type { FindingRow } from "../../../shared/schemas/finding";
import { type DataColumn, DataTable, type DataTableProps } from "../../components/data-table";
import {
  AtEarFigure,
  DayStrip,
  OutsideFigure,
  TableStripGround,
  TableStripScale,
  useTableFrame,
} from "../../components/day-figures";
import { FindingDue } from "../../components/finding-due";
import { FindingWords } from "../../components/finding-words";
import { TextLink } from "../../components/link";
import { useKeepFindingOrder } from "../../lib/finding-order";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";

/** How far over at the ear: what sorts people. */
const overBy = ({ figures }: FindingRow): number =>
  figures?.atEarDb == null
    ? Number.NEGATIVE_INFINITY
    : { over: 2000, "cant-tell-yet": 1000, under: 0, "not-assessed": -1000 }[figures.verdictAtEar] +
      figures.atEarDb;

/** After every date that is one. */
const NEVER = "9999-12-31";

/** A group's days are counted worker by worker, and say so. */
function daysSince(i18n: I18n, locale: Locale, finding: FindingRow): string {
  const words = {
    days: finding.daysCount,
    figure: formatNumber(finding.daysCount, 0, locale),
    date: formatShortDate(finding.firstDate, locale),
  };
  return finding.worker
    ? i18n.t("{days, plural, one {# day} other {{figure} days}} since {date}", words)
    : i18n.t(
        "{days, plural, one {# day} other {{figure} days}} of {workers, plural, one {# worker} other {# workers}} since {date}",
        { ...words, workers: finding.workersCount },
      );
}

export function FindingsTable({
  rows,
  hidesWorker = false,
  todayAt,
  ...rest
}: {
  rows: readonly FindingRow[];
  /** On a worker's own page. */
  hidesWorker?: boolean;
  /** Today at a site: what was due before it is overdue. */
  todayAt: (siteId: string) => string;
  empty: ReactNode;
} & Pick<DataTableProps<FindingRow>, "state" | "error" | "onRetry" | "more">) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const days = useMemo(() => rows.map(({ figures }) => figures), [rows]);
  const frame = useTableFrame(days);
  const sorted = rows.toSorted(
    (a, b) =>
      Number(a.state === "closed") - Number(b.state === "closed") ||
      Number(isOverdue(b, todayAt(b.siteId))) - Number(isOverdue(a, todayAt(a.siteId))) ||
      (a.dueOn ?? NEVER).localeCompare(b.dueOn ?? NEVER) ||
      overBy(b) - overBy(a),
  );
  useKeepFindingOrder(sorted.map(({ id }) => id));
  const columns: DataColumn<FindingRow>[] = [
    {
      id: "due",
      head: i18n.t("Due"),
      cell: ({ dueOn, state, siteId }) =>
        state === "closed" ? (
          "–"
        ) : (
          <FindingDue dueOn={dueOn} today={todayAt(siteId)} isSettled={state === "done"} />
        ),
    },
    {
      id: "wrong",
      head: i18n.t("What is wrong, and its state"),
      isRowHead: true,
      cell: (finding) => (
        <span className="two-lines">
          <TextLink to={paths.finding(finding.id)}>{findingWord(i18n, finding.kind)}</TextLink>
          <span className="beneath">
            {findingStateWord(i18n, finding.state)}
            {finding.ownerName && `, ${isolate(finding.ownerName)}`}
            {finding.wentUp && `; ${i18n.t("went up to {name}", { name: finding.wentUp.name })}`}
          </span>
        </span>
      ),
    },
    ...(hidesWorker
      ? []
      : [
          {
            id: "who",
            head: i18n.t("Who"),
            cell: (finding: FindingRow) => <Who finding={finding} />,
          },
        ]),
    {
      id: "at-ear",
      head: i18n.t("At the ear"),
      unit: i18n.t("day, dB"),
      cell: ({ figures }) => (figures ? <AtEarFigure figures={figures} /> : "–"),
    },
    {
      id: "strip",
      kind: "strip",
      head: <TableStripScale frame={frame} />,
      widthPx: 216,
      filler: <TableStripGround frame={frame} />,
      cell: ({ figures }) =>
        figures ? <DayStrip figures={figures} isHidden /> : <TableStripGround frame={frame} />,
    },
    {
      id: "outside",
      head: i18n.t("Without protection"),
      unit: i18n.t("day, dB"),
      cell: ({ figures }) => (figures ? <OutsideFigure figures={figures} /> : "–"),
    },
    {
      id: "todo",
      head: i18n.t("What to do, then what was noticed"),
      cell: (finding) => (
        <FindingWords
          finding={finding}
          more={finding.daysCount > 1 ? `; ${daysSince(i18n, locale, finding)}` : ""}
        />
      ),
    },
  ];
  return (
    <div className="findings-table stacked-table">
      <DataTable
        caption={i18n.t("Findings, overdue and soonest due first")}
        columns={columns}
        rows={sorted}
        rowKey={({ id }) => id}
        isTwoLine
        {...rest}
      />
    </div>
  );
}

function Who({ finding: { worker, subjectName, crewName } }: { finding: FindingRow }) {
  if (!worker) return <b>{subjectName ?? "–"}</b>;
  return (
    <span className="two-lines">
      <TextLink className="is-quiet is-name" to={paths.worker(worker.id)}>
        {worker.name}
      </TextLink>
      <span className="beneath">
        {[worker.employeeNumber, crewName].filter(Boolean).join(", ")}
      </span>
    </span>
  );
}
