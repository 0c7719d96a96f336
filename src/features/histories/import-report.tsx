import { useLingui } from "@lingui/react";
import { formatInstant, formatTime } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import type { HistoryIssue, HistoryReport } from "../../../shared/schemas/history";
import { DataTable } from "../../components/data-table";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { CHANNEL_SYMBOL, historyIssueText } from "./import-words";

function linkOf({ params }: HistoryIssue): string | null {
  if (params.historyId) return paths.history(String(params.historyId));
  return params.runId ? paths.run(String(params.runId)) : null;
}

/** Every question of the report once: what is accepted by ticking. */
const questionsOf = (issues: readonly HistoryIssue[]) => {
  const asked = issues.filter(({ severity }) => severity === "asked");
  return asked.filter(
    (issue, index) => asked.findIndex(({ code }) => code === issue.code) === index,
  );
};

/** What a reading of the file found: what is refused, what is asked, what was understood. */
export function HistoryReportView({
  report,
  timeZone,
  answers,
  onAnswer,
}: {
  report: HistoryReport;
  timeZone: string;
  answers: ReadonlySet<string>;
  /** Absent where nothing can be answered any more. */
  onAnswer?: (code: string, isAccepted: boolean) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const text = (issue: HistoryIssue) => historyIssueText(i18n, issue, { locale, timeZone });
  const questions = questionsOf(report.issues);
  const listed = report.issues.filter(
    (issue) => issue.severity !== "asked" || !questions.includes(issue),
  );
  const { startsAt, endsAt, intervalMs, valuesCount } = report;
  return (
    <>
      {startsAt !== null && endsAt !== null && intervalMs !== null && (
        <p className="review-lead">
          {i18n.t("{from} to {to}: {duration}, one value every {seconds} s.", {
            from: formatInstant(startsAt, timeZone, locale),
            to: formatTime(endsAt, timeZone),
            duration: formatDuration((valuesCount * intervalMs) / 60_000, locale),
            seconds: formatNumber(intervalMs / 1000, intervalMs % 1000 === 0 ? 0 : 3, locale),
          })}
        </p>
      )}
      {questions.length > 0 && (
        <fieldset className="import-questions">
          <legend>{i18n.t("To be answered")}</legend>
          {questions.map((issue) => (
            <label key={issue.code} className="choice">
              <input
                type="checkbox"
                checked={answers.has(issue.code) || answers.has(`${issue.code}-second`)}
                disabled={!onAnswer}
                onChange={(event) => onAnswer?.(issue.code, event.target.checked)}
              />
              <span>
                {issue.line > 0 && <b>{i18n.t("Line {line}", { line: issue.line })} </b>}
                {issue.column !== null && <span className="mono">{issue.column} </span>}
                {text(issue)}
              </span>
            </label>
          ))}
        </fieldset>
      )}
      {report.channels.some(({ lowestDb }) => lowestDb !== null) && (
        <DataTable
          caption={i18n.t("Levels that were read")}
          rows={report.channels}
          rowKey={({ channel }) => channel}
          columns={[
            {
              id: "channel",
              head: i18n.t("Level"),
              isRowHead: true,
              cell: ({ channel }) => CHANNEL_SYMBOL[channel],
            },
            {
              id: "lowest",
              head: i18n.t("Lowest"),
              unit: "dB",
              kind: "figure",
              cell: ({ lowestDb }) => formatLevel(lowestDb, locale),
            },
            {
              id: "highest",
              head: i18n.t("Highest"),
              unit: "dB",
              kind: "figure",
              cell: ({ highestDb }) => formatLevel(highestDb, locale),
            },
            {
              id: "missing",
              head: i18n.t("Missing"),
              kind: "figure",
              cell: ({ missing }) => formatNumber(missing, 0, locale),
            },
          ]}
        />
      )}
      {listed.length > 0 && (
        <DataTable<HistoryIssue & { key: string }>
          caption={i18n.t("What was found")}
          rows={listed.map((issue, index) => ({ ...issue, key: `${index}` }))}
          rowKey={({ key }) => key}
          columns={[
            {
              id: "line",
              head: i18n.t("Line"),
              kind: "figure",
              widthPx: 70,
              cell: ({ line }) => (line > 0 ? formatNumber(line, 0, locale) : ""),
            },
            {
              id: "column",
              head: i18n.t("Column"),
              cell: ({ column }) => <span className="mono">{column}</span>,
              hidesOnPhone: true,
            },
            {
              id: "what",
              head: i18n.t("What was found"),
              isRowHead: true,
              cell: (issue) => {
                const to = linkOf(issue);
                return (
                  <>
                    {issue.severity === "refused" && <b>{i18n.t("Refused")}: </b>}
                    {text(issue)} {to && <TextLink to={to}>{i18n.t("Look at it")}</TextLink>}
                  </>
                );
              },
            },
          ]}
        />
      )}
      {report.issuesCount > report.issues.length && (
        <p className="table-foot">
          {i18n.t("The first {shown} of {all} are listed.", {
            shown: report.issues.length,
            all: formatNumber(report.issuesCount, 0, locale),
          })}
        </p>
      )}
    </>
  );
}
