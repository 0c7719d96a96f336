import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import type { RosterPerson, RosterReport } from "../../../shared/schemas/roster";
import { DataTable } from "../../components/data-table";
import { useLocale } from "../../lib/i18n";
import { IssuesTable } from "./import-report";

function whatWord(i18n: I18n, what: RosterPerson["what"]): string {
  switch (what) {
    case "joins":
      return i18n.t("Joins");
    case "changes":
      return i18n.t("Is changed");
    case "leaves":
      return i18n.t("Leaves");
  }
}

function changeWord(i18n: I18n, change: RosterPerson["changes"][number]): string {
  switch (change) {
    case "name":
      return i18n.t("name");
    case "employer":
      return i18n.t("employer");
    case "language":
      return i18n.t("language");
    case "job":
      return i18n.t("job");
    case "crew":
      return i18n.t("crew");
    case "site":
      return i18n.t("site");
    case "hired-on":
      return i18n.t("first day");
  }
}

/** "3 join, 2 change, 1 leaves, 40 stay as they are". */
export function rosterCounts(i18n: I18n, { joiners, changed, leavers, unchanged }: RosterReport) {
  return i18n.t(
    "{joiners, plural, one {# joins} other {# join}}, {changed, plural, one {# changes} other {# change}}, {leavers, plural, one {# leaves} other {# leave}}, {unchanged, plural, one {# stays as it is} other {# stay as they are}}",
    { joiners, changed, leavers, unchanged },
  );
}

/** Who would join, change and leave; or what stands in the way. */
export function RosterReportView({ report }: { report: RosterReport }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const all = report.joiners + report.changed + report.leavers;
  return (
    <>
      <p className="review-lead">
        {i18n.t("{lines, plural, one {# line} other {# lines}}: {counts}.", {
          lines: report.lines,
          counts: rosterCounts(i18n, report),
        })}
      </p>
      <IssuesTable
        issues={report.issues}
        hidden={report.issuesCount - report.issues.length}
        count={report.issuesCount}
      />
      {report.issuesCount === 0 && report.people.length > 0 && (
        <>
          <DataTable<RosterPerson>
            caption={i18n.t("Who joins, changes and leaves")}
            rows={report.people}
            rowKey={({ employeeNumber }) => employeeNumber}
            columns={[
              {
                id: "number",
                head: i18n.t("Number"),
                sortValue: ({ employeeNumber }) => employeeNumber,
                cell: ({ employeeNumber }) => <span className="mono">{employeeNumber}</span>,
              },
              {
                id: "name",
                head: i18n.t("Name"),
                isRowHead: true,
                sortValue: ({ name }) => name,
                cell: ({ name }) => <bdi>{name}</bdi>,
              },
              {
                id: "what",
                head: i18n.t("What happens"),
                sortValue: ({ what }) => what,
                cell: ({ what, changes }) =>
                  changes.length > 0
                    ? `${whatWord(i18n, what)}: ${changes.map((change) => changeWord(i18n, change)).join(", ")}`
                    : whatWord(i18n, what),
              },
              {
                id: "date",
                head: i18n.t("Date"),
                sortValue: ({ date }) => date,
                cell: ({ date }) => (date === null ? "–" : formatShortDate(date, locale)),
              },
            ]}
          />
          {all > report.people.length && (
            <p className="table-foot">
              {i18n.t("The first {shown} of {all} are listed.", {
                shown: report.people.length,
                all,
              })}
            </p>
          )}
        </>
      )}
    </>
  );
}
