import { useLingui } from "@lingui/react";
import { dutyKindWord, dutyWord } from "../../../shared/findings/duty-words";
import { dutyOf } from "../../../shared/rule-sets/duties";
import { resultNoticeOf } from "../../../shared/rule-sets/result-notice";
import type { DutyItem } from "../../../shared/schemas/duty";
import { DataTable, type DataTableProps } from "../../components/data-table";
import { FindingDue } from "../../components/finding-due";
import { TextLink } from "../../components/link";
import { paths } from "../../paths";
import { dutyPath } from "./duty-link";

/** The text that makes a thing due, where it is a rule and not a date somebody stated. */
function citationOf({ kind, criterion, ruleSetKey }: DutyItem): string | null {
  if (kind === "training" || kind === "monitoring")
    return ruleSetKey && (dutyOf(ruleSetKey, kind)?.citation ?? null);
  if (kind === "notice") return ruleSetKey && resultNoticeOf(ruleSetKey).citation;
  if (kind !== "finding" || !criterion) return null;
  const [key = "", criterionId = ""] = criterion.split(":");
  const duty = dutyOf(key, "act-at-once");
  return duty?.criterionIds.includes(criterionId) ? duty.citation : null;
}

/** What is due, worst first. */
export function DutiesTable({
  todayAt,
  showsSite,
  ...table
}: { todayAt: (siteId: string) => string; showsSite: boolean } & Pick<
  DataTableProps<DutyItem>,
  "rows" | "state" | "error" | "onRetry" | "more" | "empty"
>) {
  const { i18n } = useLingui();
  return (
    <DataTable<DutyItem>
      {...table}
      caption={i18n.t("What is due, longest overdue first")}
      rowKey={({ key }) => key}
      isTwoLine
      stacksOnPhone
      columns={[
        {
          id: "due",
          head: i18n.t("Due"),
          cell: ({ dueOn, siteId }) => <FindingDue dueOn={dueOn} today={todayAt(siteId)} />,
        },
        {
          id: "what",
          head: i18n.t("What"),
          isRowHead: true,
          cell: (item) => (
            <span className="two-lines">
              <TextLink to={dutyPath(item)}>{dutyWord(i18n, item)}</TextLink>
              <span className="beneath">
                {item.kind === "finding" ? dutyKindWord(i18n, item.kind) : item.what}
              </span>
            </span>
          ),
        },
        {
          id: "who",
          head: i18n.t("Who, where"),
          cell: ({ kind, worker, what, siteName }) => (
            <span className="two-lines">
              {worker ? (
                <TextLink className="is-quiet is-name" to={paths.worker(worker.id)}>
                  {worker.name}
                </TextLink>
              ) : (
                ((kind === "finding" ? what : null) ?? "–")
              )}
              {showsSite && <span className="beneath">{siteName}</span>}
            </span>
          ),
        },
        {
          id: "why",
          head: i18n.t("By what rule"),
          cell: (item) => citationOf(item) ?? i18n.t("its own date"),
        },
      ]}
    />
  );
}
