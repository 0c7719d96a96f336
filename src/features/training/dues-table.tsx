import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import { ruleSetVersion } from "../../../shared/rule-sets";
import { dutyOf } from "../../../shared/rule-sets/duties";
import type { TrainingDue } from "../../../shared/schemas/training";
import { DataTable, type DataTableProps } from "../../components/data-table";
import { FindingDue } from "../../components/finding-due";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";

/** Who is owed training, with the day from which and the text that says so. */
export function DuesTable({
  todayAt,
  ...table
}: { todayAt: (siteId: string) => string } & Pick<
  DataTableProps<TrainingDue>,
  "rows" | "state" | "error" | "onRetry" | "more" | "empty"
>) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const basis = (key: string) => {
    const ruleSet = ruleSetVersion(key, 1);
    const duty = dutyOf(key, "training");
    return [ruleSet && i18n._(ruleSet.title), duty?.citation].filter(Boolean).join(", ");
  };
  return (
    <DataTable<TrainingDue>
      {...table}
      caption={i18n.t("Who is owed training, longest overdue first")}
      rowKey={({ workerId }) => workerId}
      isTwoLine
      stacksOnPhone
      columns={[
        {
          id: "due",
          head: i18n.t("Due"),
          cell: ({ dueOn, siteId }) => <FindingDue dueOn={dueOn} today={todayAt(siteId)} />,
        },
        {
          id: "who",
          head: i18n.t("Who"),
          isRowHead: true,
          cell: ({ workerId, workerName, employeeNumber }) => (
            <span className="two-lines">
              <TextLink to={paths.worker(workerId)}>{workerName}</TextLink>
              <span className="beneath">{employeeNumber}</span>
            </span>
          ),
        },
        {
          id: "last",
          head: i18n.t("Trained last"),
          cell: ({ trainedOn }) =>
            trainedOn === null ? <b>{i18n.t("never")}</b> : formatShortDate(trainedOn, locale),
        },
        {
          id: "why",
          head: i18n.t("Why"),
          cell: ({ exposedOn, ruleSetKey, siteName }) => (
            <span className="two-lines">
              {i18n.t("The first day in such noise within the last year was {date}, at {site}.", {
                date: formatShortDate(exposedOn, locale),
                site: siteName,
              })}
              <span className="beneath">{basis(ruleSetKey)}</span>
            </span>
          ),
        },
      ]}
    />
  );
}
