import { useLingui } from "@lingui/react";
import { useQuery, useQueryClient } from "@tanstack/react-query";
import { useEffect, useState } from "react";
import { formatInstant } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import { isolate } from "../../../shared/i18n/isolate";
import { ErasureView } from "../../../shared/schemas/retention";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { TextButton } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { ByWhom } from "./by-whom";
import { type Decision, DecisionDialog } from "./decision-dialog";
import { retentionQueries, useDecision } from "./retention-queries";
import { keptWord } from "./retention-words";

/** What was proposed, by whom, and how far it is. */
export function ErasuresTable({ timeZone }: { timeZone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const erasures = useQuery(retentionQueries.erasures);
  const client = useQueryClient();
  const decided = erasures.data?.reduce(
    (sum, { people, waiting }) => sum + people.length - waiting,
    0,
  );
  // Whoever was erased or kept meanwhile stands in another list now.
  useEffect(() => {
    if (decided !== undefined)
      void client.invalidateQueries({ queryKey: [...retentionQueries.all, "people"] });
  }, [client, decided]);
  const at = (instant: string) => formatInstant(instant, timeZone, locale);
  const state = (one: ErasureView) => {
    switch (one.state) {
      case "proposed":
        return i18n.t("waits for a second person");
      case "approved":
        return i18n.t("being done: {done} of {all}", {
          done: formatNumber(one.people.length - one.waiting, 0, locale),
          all: formatNumber(one.people.length, 0, locale),
        });
      case "done":
        return one.doneAt === null ? "" : i18n.t("done {at}", { at: at(one.doneAt) });
      case "withdrawn":
        return i18n.t("withdrawn by {name}", { name: isolate(one.withdrawnBy ?? "") });
    }
  };
  const columns: DataColumn<ErasureView>[] = [
    {
      id: "proposed",
      head: i18n.t("Proposed"),
      isRowHead: true,
      cell: ({ proposedBy, proposedAt, siteName }) => (
        <ByWhom name={proposedBy} at={`${at(proposedAt)}, ${siteName}`} />
      ),
    },
    {
      id: "people",
      head: i18n.t("Who"),
      cell: ({ people }) => people.map(({ name }) => isolate(name)).join(", "),
    },
    {
      id: "approved",
      head: i18n.t("Approved"),
      cell: ({ approvedBy, approvedAt }) =>
        approvedBy !== null &&
        approvedAt !== null && <ByWhom name={approvedBy} at={at(approvedAt)} />,
    },
    {
      id: "state",
      head: i18n.t("State"),
      cell: (one) => (
        <>
          {state(one)}
          {one.state !== "withdrawn" &&
            one.kept.map(({ because, count }) => (
              <span key={because} className="visitor-mail">
                {i18n.t(
                  "{count, plural, one {# person kept: {why}} other {# people kept: {why}}}",
                  {
                    count,
                    why: keptWord(i18n, because),
                  },
                )}
              </span>
            ))}
        </>
      ),
    },
    {
      id: "decide",
      head: <span className="sr-only">{i18n.t("What to do")}</span>,
      cell: (one) => one.state === "proposed" && <Decide erasure={one} />,
    },
  ];
  return (
    <DataTable
      caption={i18n.t("Proposed and erased")}
      columns={columns}
      rows={erasures.data ?? []}
      rowKey={({ id }) => id}
      state={erasures.isPending ? "loading" : erasures.isError ? "failed" : "ready"}
      error={erasures.error}
      onRetry={() => void erasures.refetch()}
      stacksOnPhone
      empty={<Empty title={i18n.t("Nothing was proposed yet.")} />}
    />
  );
}

/** Approve, which another person does, or withdraw; each asks once. */
function Decide({ erasure }: { erasure: ErasureView }) {
  const { i18n } = useLingui();
  const [asking, setAsking] = useState<Decision | null>(null);
  const decide = useDecision(`/erasures/${erasure.id}`, ErasureView, erasure.revision, () =>
    setAsking(null),
  );
  const names = erasure.people.map(({ name }) => isolate(name)).join(", ");
  return (
    <>
      {erasure.can.approve ? (
        <TextButton onClick={() => setAsking("approval")}>{i18n.t("Approve")}</TextButton>
      ) : (
        i18n.t("Somebody else approves.")
      )}{" "}
      {erasure.can.withdraw && (
        <TextButton onClick={() => setAsking("withdrawal")}>{i18n.t("Withdraw")}</TextButton>
      )}
      <DecisionDialog
        asking={asking}
        decide={decide}
        onClose={() => setAsking(null)}
        asks={{
          approval: {
            title: i18n.t("{count, plural, one {Erase one person?} other {Erase # people?}}", {
              count: erasure.people.length,
            }),
            lead: i18n.t("{names}. It begins at once and can’t be taken back.", { names }),
            act: i18n.t("Erase"),
          },
          withdrawal: {
            title: i18n.t("Withdraw the proposal?"),
            lead: i18n.t("{names} stay as they are and can be proposed again.", { names }),
            act: i18n.t("Withdraw"),
          },
        }}
      />
    </>
  );
}
