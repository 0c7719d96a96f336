import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { Link } from "react-router-dom";
import type { Locale } from "../../../shared/i18n/index";
import type { MeasuringNeed } from "../../../shared/schemas/survey";
import { needWords } from "../../../shared/surveys/words";
import { DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";

/** How a survey begins that is planned for these reasons: its purpose, and the tasks that they name. */
function startOfSurvey(
  i18n: I18n,
  { siteId, jobId, reasons }: Pick<MeasuringNeed, "siteId" | "jobId" | "reasons">,
  locale: Locale,
): string {
  const purpose = reasons.map((reason) => {
    const { title, facts } = needWords(i18n, reason, locale);
    return `${title}: ${facts}.`;
  });
  const taskIds = new Set(reasons.flatMap((reason) => ("taskIds" in reason ? reason.taskIds : [])));
  const search = new URLSearchParams({ site: siteId, job: jobId, purpose: purpose.join("\n") });
  if (taskIds.size > 0) {
    search.set("strategy", "task");
    search.set("tasks", [...taskIds].join(","));
  }
  return search.toString();
}

/** Groups that want measuring, the worst first, each with its reasons and the survey that would answer them. */
export function NeedsTable({
  rows,
  groupsCount,
  canPlan,
  showsSite,
  state,
  error,
  onRetry,
}: {
  rows: readonly MeasuringNeed[];
  groupsCount: number;
  canPlan: boolean;
  showsSite: boolean;
  state: "ready" | "loading" | "failed";
  error: unknown;
  onRetry: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <DataTable<MeasuringNeed>
      caption={i18n.t("Groups that want measuring, the worst first")}
      rows={rows}
      rowKey={({ jobId }) => jobId}
      isTwoLine
      stacksOnPhone
      state={state}
      error={error}
      onRetry={onRetry}
      empty={
        groupsCount === 0 ? (
          <Empty title={i18n.t("There is no group yet.")}>
            {i18n.t("A group is the workers of a job.")}{" "}
            <TextLink to={paths.jobs}>{i18n.t("Jobs")}</TextLink>
          </Empty>
        ) : (
          <Empty title={i18n.t("Every group is measured, and nothing has changed since.")} />
        )
      }
      columns={[
        {
          id: "group",
          head: i18n.t("Group"),
          isRowHead: true,
          cell: ({ jobId, jobName, siteName, workersCount }) => (
            <span className="two-lines">
              <TextLink to={paths.group(jobId)}>{jobName}</TextLink>
              <span className="beneath">
                {[
                  i18n.t("{count, plural, one {# worker} other {# workers}}", {
                    count: workersCount,
                  }),
                  showsSite ? siteName : null,
                ]
                  .filter(Boolean)
                  .join(", ")}
              </span>
            </span>
          ),
        },
        {
          id: "why",
          head: i18n.t("Why"),
          cell: ({ reasons }) => (
            <ul className="need-reasons">
              {reasons.map((reason) => {
                const { title, facts } = needWords(i18n, reason, locale);
                return (
                  <li key={`${reason.code} ${facts}`}>
                    <b>{title}</b> <span className="beneath">{facts}</span>
                  </li>
                );
              })}
            </ul>
          ),
        },
        {
          id: "survey",
          head: i18n.t("What to do"),
          kind: "right",
          cell: ({ jobId, jobName, siteId, surveyId, reasons }) =>
            surveyId ? (
              <TextLink to={paths.survey(surveyId)}>{i18n.t("Survey under way")}</TextLink>
            ) : canPlan ? (
              <Link
                className="link is-strong"
                to={`${paths.newSurvey}?${startOfSurvey(i18n, { siteId, jobId, reasons }, locale)}`}
                aria-label={i18n.t("Plan a survey of {group}", { group: jobName })}
              >
                {i18n.t("Plan a survey")}
              </Link>
            ) : (
              i18n.t("no survey yet")
            ),
        },
      ]}
    />
  );
}
