import { useLingui } from "@lingui/react";
import { type ReactNode, useMemo } from "react";
import { formatShortDate } from "../../../shared/format/date";
import type { WorkerRow } from "../../../shared/schemas/worker";
import { type DataColumn, DataTable, type DataTableProps } from "../../components/data-table";
import {
  AtEarFigure,
  DayStrip,
  OutsideFigure,
  TableStripGround,
  TableStripScale,
  useTableFrame,
} from "../../components/day-figures";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";

export function WorkersTable({
  rows,
  showsSite,
  todayAt,
  ...rest
}: {
  rows: readonly WorkerRow[];
  showsSite: boolean;
  todayAt: (siteId: string) => string;
  empty: ReactNode;
} & Pick<DataTableProps<WorkerRow>, "state" | "error" | "onRetry" | "more">) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const days = useMemo(() => rows.map(({ lastDay }) => lastDay), [rows]);
  const frame = useTableFrame(days);
  const columns: DataColumn<WorkerRow>[] = [
    {
      id: "wrong",
      head: i18n.t("Worker"),
      isRowHead: true,
      cell: (worker) => (
        <span className="two-lines">
          <TextLink to={paths.worker(worker.id)}>{worker.name}</TextLink>
          <span className="beneath">
            {[
              worker.employeeNumber,
              worker.crewName ?? i18n.t("no crew"),
              showsSite && worker.siteName,
            ]
              .filter(Boolean)
              .join(", ")}
          </span>
        </span>
      ),
    },
    {
      id: "who",
      head: i18n.t("Job, employer"),
      cell: (worker) => (
        <span className="two-lines">
          <span>{worker.jobName ?? "–"}</span>
          <span className="beneath">{employerWords(i18n, worker)}</span>
        </span>
      ),
    },
    {
      id: "due",
      head: i18n.t("Last day"),
      cell: ({ id, siteId, lastDay, leftOn }) => (
        <span className="two-lines">
          {lastDay ? (
            <TextLink to={paths.result(id, lastDay.date)}>
              {formatShortDate(lastDay.date, locale)}
            </TextLink>
          ) : (
            <span>{i18n.t("none yet")}</span>
          )}
          {leftOn && (
            <span className="beneath">
              {leftOn < todayAt(siteId)
                ? i18n.t("left {date}", { date: formatShortDate(leftOn, locale) })
                : i18n.t("leaves {date}", { date: formatShortDate(leftOn, locale) })}
            </span>
          )}
        </span>
      ),
    },
    {
      id: "at-ear",
      head: i18n.t("At the ear"),
      unit: i18n.t("day, dB"),
      cell: ({ lastDay }) => (lastDay ? <AtEarFigure figures={lastDay} /> : "–"),
    },
    {
      id: "strip",
      kind: "strip",
      head: <TableStripScale frame={frame} />,
      widthPx: 216,
      filler: <TableStripGround frame={frame} />,
      cell: ({ lastDay }) =>
        lastDay ? <DayStrip figures={lastDay} isHidden /> : <TableStripGround frame={frame} />,
    },
    {
      id: "outside",
      head: i18n.t("Without protection"),
      unit: i18n.t("day, dB"),
      cell: ({ lastDay }) => (lastDay ? <OutsideFigure figures={lastDay} /> : "–"),
    },
    {
      id: "action",
      head: i18n.t("Open findings"),
      kind: "right",
      cell: ({ id, openFindings }) =>
        openFindings > 0 ? (
          <TextLink to={`${paths.worker(id)}#findings`}>
            <b className="mono">{openFindings}</b>
            <span className="sr-only">{i18n.t("open findings")}</span>
          </TextLink>
        ) : (
          <span className="mono is-zero">0</span>
        ),
    },
  ];
  return (
    <div className="workers-table stacked-table">
      <DataTable
        caption={i18n.t("Workers by name, with their last day")}
        columns={columns}
        rows={rows}
        rowKey={({ id }) => id}
        isTwoLine
        {...rest}
      />
    </div>
  );
}

export function employerWords(
  i18n: ReturnType<typeof useLingui>["i18n"],
  { employer, employerName }: Pick<WorkerRow, "employer" | "employerName">,
): string {
  const kinds = { own: i18n.t("own"), agency: i18n.t("agency"), contractor: i18n.t("contractor") };
  return employerName
    ? i18n.t("{kind}, {name}", { kind: kinds[employer], name: employerName })
    : kinds[employer];
}
