import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import type { VisitorView } from "../../../shared/schemas/visitor";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { useLocale } from "../../lib/i18n";
import { untilText } from "../../lib/until-text";
import { EndVisit } from "./end-visit";

function stateWord(i18n: I18n, state: VisitorView["state"]): string {
  switch (state) {
    case "expected":
      return i18n.t("has not signed in");
    case "here":
      return i18n.t("has signed in");
    case "over":
      return i18n.t("over");
  }
}

/** Who reads what until when; visits that are over stand beneath. */
export function VisitorsTable({
  visitors,
  state,
  error,
  onRetry,
}: {
  visitors: readonly VisitorView[];
  state: "ready" | "loading" | "failed";
  error: unknown;
  onRetry: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const reads = ({ siteName, year }: VisitorView) =>
    i18n.t("{site}, {year}", { site: siteName, year: String(year) });
  const columns: DataColumn<VisitorView>[] = [
    {
      id: "name",
      head: i18n.t("Name"),
      isRowHead: true,
      cell: (visitor) => (
        <>
          <bdi>{visitor.name}</bdi>
          <span className="visitor-mail">{visitor.email}</span>
          <span className="visitor-reads">{reads(visitor)}</span>
        </>
      ),
    },
    {
      id: "reads",
      head: i18n.t("Reads"),
      cell: reads,
      hidesOnPhone: true,
    },
    {
      id: "until",
      head: i18n.t("Until"),
      cell: ({ endsAt, timeZone }) => (
        <>
          {untilText(i18n, endsAt, timeZone, locale)}
          <span className="visitor-mail">{timeZone}</span>
        </>
      ),
    },
    {
      id: "state",
      head: i18n.t("State"),
      cell: (one) => stateWord(i18n, one.state),
      hidesOnPhone: true,
    },
    {
      id: "by",
      head: i18n.t("Let in by"),
      cell: ({ grantedBy }) => grantedBy ?? "–",
      hidesOnPhone: true,
    },
    {
      id: "end",
      head: <span className="sr-only">{i18n.t("What to do")}</span>,
      cell: (visitor) => (visitor.state === "over" ? null : <EndVisit visitor={visitor} />),
    },
  ];
  return (
    <DataTable
      caption={i18n.t("Visitors")}
      columns={columns}
      rows={visitors}
      rowKey={({ id }) => id}
      state={state}
      error={error}
      onRetry={onRetry}
      groupOf={(visitor) =>
        visitor.state === "over"
          ? { key: "over", label: i18n.t("Ended") }
          : { key: "current", label: i18n.t("May come in") }
      }
      empty={<Empty title={i18n.t("Nobody is let in for a while.")} />}
    />
  );
}
