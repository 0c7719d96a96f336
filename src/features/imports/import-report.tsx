import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import type { ImportIssue, ImportReport } from "../../../shared/schemas/import";
import { DataTable } from "../../components/data-table";
import { useLocale } from "../../lib/i18n";
import { countsText, importIssueText } from "./import-words";

/** What would come of a file, or what stands in its way, line by line. */
export function ImportReportView({ report }: { report: ImportReport }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { issues, issuesCount, lines, workers, firstDate, lastDate } = report;
  const faults = issues.filter(({ code }) => code !== "reason-missing");
  const isReasonMissing = faults.length < issues.length;
  return (
    <>
      <p className="review-lead">
        {i18n.t("{lines, plural, one {# line} other {# lines}}: {counts}.", {
          lines,
          counts: countsText(i18n, report),
        })}{" "}
        {firstDate !== null &&
          lastDate !== null &&
          i18n.t("{workers, plural, one {# worker} other {# workers}}, {from} to {to}.", {
            workers,
            from: formatShortDate(firstDate, locale),
            to: formatShortDate(lastDate, locale),
          })}
      </p>
      {isReasonMissing && (
        <p className="field-error mb-3">
          {i18n.t("The file changes what is recorded already. Say why above, then look again.")}
        </p>
      )}
      <IssuesTable issues={faults} hidden={issuesCount - issues.length} count={issuesCount} />
    </>
  );
}

/** What stands in the way of a file, line by line. */
export function IssuesTable({
  issues,
  hidden,
  count,
}: {
  issues: readonly ImportIssue[];
  /** How many are not among them. */
  hidden: number;
  count: number;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (issues.length === 0) return null;
  return (
    <>
      <DataTable<ImportIssue>
        caption={i18n.t("What stands in the way")}
        rows={issues}
        rowKey={(issue) => `${issue.line} ${issue.field} ${issue.code}`}
        columns={[
          {
            id: "line",
            head: i18n.t("Line"),
            kind: "figure",
            widthPx: 56,
            isRowHead: true,
            sortValue: ({ line }) => line,
            cell: ({ line }) => line,
          },
          {
            id: "field",
            head: i18n.t("Column"),
            sortValue: ({ field }) => field,
            cell: ({ field }) => <span className="mono">{field}</span>,
          },
          {
            id: "what",
            head: i18n.t("What is wrong, and how to mend it"),
            sortValue: ({ code }) => code,
            cell: (issue) => importIssueText(i18n, issue),
          },
        ]}
      />
      {hidden > 0 && (
        <p className="table-foot">
          {i18n.t("The first {shown} of {all} are listed.", {
            shown: count - hidden,
            all: formatNumber(count, 0, locale),
          })}
        </p>
      )}
    </>
  );
}
