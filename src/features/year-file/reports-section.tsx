import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { formatInstant } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import type { YearReportRow } from "../../../shared/schemas/report";
import { Button } from "../../components/button";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { FormProblem } from "../../components/form-problem";
import { Section } from "../../components/page";
import { apiAddress } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import { type YearOfSite, yearFileQueries } from "./queries";
import { useIssueReport } from "./report-queries";

/** Reports for management: those issued, each to be taken again as it was, and for an officer a new one. */
export function ReportsSection({ year, timeZone }: { year: YearOfSite; timeZone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const reports = useQuery(yearFileQueries.reports(year));
  const issue = useIssueReport(year);
  const rows = reports.data?.rows ?? [];
  const mayIssue = reports.data?.can.issue ?? false;
  const columns: DataColumn<YearReportRow>[] = [
    {
      id: "number",
      head: i18n.t("Report"),
      isRowHead: true,
      cell: ({ id, number }) => (
        <a className="link" href={apiAddress(`/year-reports/${id}/report.pdf`)} download>
          {i18n.t("Report {number} (PDF)", { number: String(number) })}
        </a>
      ),
    },
    {
      id: "asOf",
      head: i18n.t("As of"),
      unit: timeZone,
      cell: ({ asOf }) => formatInstant(asOf, timeZone, locale),
    },
    { id: "by", head: i18n.t("By"), cell: ({ authorName }) => <bdi>{authorName}</bdi> },
    {
      id: "results",
      head: i18n.t("Results"),
      kind: "figure",
      cell: ({ resultsCount }) => formatNumber(resultsCount, 0, locale),
    },
  ];
  if (reports.isSuccess && !mayIssue && rows.length === 0) return null;
  return (
    <Section id="reports" title={i18n.t("Reports for management")}>
      <p className="year-reports-lead">
        {i18n.t(
          "People in noise, measured and never measured, verdicts, and what changed since the last report. What is issued stays as it is.",
        )}
      </p>
      {mayIssue && (
        <p>
          <Button
            isBusy={issue.isPending}
            onClick={() => {
              if (issue.begin()) issue.mutate(year);
            }}
          >
            {i18n.t("Issue a report of {year}", { year: String(year.year) })}
          </Button>
        </p>
      )}
      <FormProblem error={issue.error} />
      <DataTable
        caption={i18n.t("Reports for management")}
        columns={columns}
        rows={rows}
        rowKey={({ id }) => id}
        stacksOnPhone
        state={reports.isSuccess ? "ready" : reports.isError ? "failed" : "loading"}
        error={reports.error}
        onRetry={() => void reports.refetch()}
        empty={<Empty title={i18n.t("No report of this year was issued yet.")} />}
      />
    </Section>
  );
}
