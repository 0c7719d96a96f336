import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { formatDate, formatInstant } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import { isolate } from "../../../shared/i18n/isolate";
import type {
  RecordTransferView,
  SuccessionDutyView,
} from "../../../shared/schemas/record-transfer";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { useLocale } from "../../lib/i18n";
import { ByWhom } from "./by-whom";
import { successionWord } from "./retention-words";
import { RuleSetTitle, RuleSource } from "./rule-cells";
import { transferQueries } from "./transfer-queries";
import { TransferSteps } from "./transfer-steps";

const BYTES_A_MB = 1_000_000;

/** Records of sites handed over to the employer that follows: how far each is, and the next step. */
export function TransfersTable({ timeZone }: { timeZone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const transfers = useQuery(transferQueries.list);
  const at = (instant: string) => formatInstant(instant, timeZone, locale);
  const columns: DataColumn<RecordTransferView>[] = [
    {
      id: "whom",
      head: i18n.t("To whom"),
      isRowHead: true,
      cell: ({ successor, siteName, passesOn, note }) => (
        <>
          <bdi>{successor}</bdi>
          <span className="visitor-mail">
            {i18n.t("{site}, passes on {date}", {
              site: isolate(siteName),
              date: formatDate(passesOn, locale),
            })}
          </span>
          {note !== "" && <span className="visitor-mail">{note}</span>}
        </>
      ),
    },
    {
      id: "proposed",
      head: i18n.t("Proposed"),
      cell: ({ proposedBy, proposedAt }) => <ByWhom name={proposedBy} at={at(proposedAt)} />,
    },
    {
      id: "approved",
      head: i18n.t("Approved"),
      cell: ({ approvedBy, approvedAt }) =>
        approvedBy !== null &&
        approvedAt !== null && <ByWhom name={approvedBy} at={at(approvedAt)} />,
    },
    { id: "state", head: i18n.t("State"), cell: (one) => <State transfer={one} at={at} /> },
    {
      id: "steps",
      head: <span className="sr-only">{i18n.t("What to do")}</span>,
      cell: (one) =>
        (one.state === "proposed" || one.state === "approved") && (
          <TransferSteps transfer={one} timeZone={timeZone} />
        ),
    },
  ];
  return (
    <DataTable
      caption={i18n.t("Records handed over")}
      columns={columns}
      rows={transfers.data?.rows ?? []}
      rowKey={({ id }) => id}
      state={transfers.isPending ? "loading" : transfers.isError ? "failed" : "ready"}
      error={transfers.error}
      onRetry={() => void transfers.refetch()}
      stacksOnPhone
      empty={<Empty title={i18n.t("No site’s records were handed over.")} />}
    />
  );
}

function State({
  transfer: { state, files, receipt, withdrawnBy },
  at,
}: {
  transfer: RecordTransferView;
  at: (instant: string) => string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const word = () => {
    switch (state) {
      case "proposed":
        return i18n.t("waits for a second person");
      case "approved":
        return files.length === 0
          ? i18n.t("waits for an officer to take the file")
          : i18n.t("waits for the successor’s receipt");
      case "done":
        return i18n.t("handed over");
      case "withdrawn":
        return i18n.t("withdrawn by {name}", { name: isolate(withdrawnBy ?? "") });
    }
  };
  return (
    <>
      {word()}
      {files.map(({ takenBy, takenAt, sizeBytes, years }) => (
        <span key={takenAt} className="visitor-mail">
          {i18n.t("file of {years}, {size} MB, taken by {name}, {at}", {
            years: yearsWord(years),
            size: formatNumber(sizeBytes / BYTES_A_MB, 1, locale),
            name: isolate(takenBy),
            at: at(takenAt),
          })}
        </span>
      ))}
      {receipt && (
        <>
          <span className="visitor-mail">
            {i18n.t("receipt signed by {name}, {date}", {
              name: isolate(receipt.signedBy),
              date: formatDate(receipt.signedOn, locale),
            })}
          </span>
          <span className="visitor-mail transfer-hash">SHA-256 {receipt.sha256}</span>
        </>
      )}
    </>
  );
}

/** "2024–2026", "2026": nobody counts gaps here, the file names each year. */
function yearsWord(years: readonly number[]): string {
  const [first, last] = [years[0], years.at(-1)];
  if (first === undefined || last === undefined) return "–";
  return first === last ? String(first) : `${first}–${last}`;
}

/** What rules at the sites say of it. */
export function SuccessionDuties() {
  const { i18n } = useLingui();
  const transfers = useQuery(transferQueries.list);
  const columns: DataColumn<SuccessionDutyView>[] = [
    {
      id: "rule",
      head: i18n.t("Rule set"),
      isRowHead: true,
      cell: ({ ruleSetKey }) => <RuleSetTitle ruleSetKey={ruleSetKey} />,
    },
    { id: "what", head: i18n.t("What it asks"), cell: (duty) => successionWord(i18n, duty) },
    {
      id: "citation",
      head: i18n.t("Source"),
      cell: (duty) => <RuleSource {...duty} />,
    },
  ];
  // Its state is the table's above.
  if (!transfers.data) return null;
  return (
    <DataTable
      caption={i18n.t("What rules ask when a site ends or is sold")}
      columns={columns}
      rows={transfers.data.duties}
      rowKey={({ ruleSetKey, kind }) => `${ruleSetKey} ${kind}`}
      state="ready"
      error={null}
      stacksOnPhone
      empty={
        <Empty
          title={i18n.t(
            "No rule at your sites is known to say anything of it. Records can be handed over all the same.",
          )}
        />
      }
    />
  );
}
