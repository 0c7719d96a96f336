import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { useState } from "react";
import { formatDate } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import type { FormerWorker } from "../../../shared/schemas/retention";
import { Button } from "../../components/button";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Dialog } from "../../components/dialog";
import { Empty } from "../../components/empty";
import { FormProblem } from "../../components/form-problem";
import { Status } from "../../components/status";
import { useLocale } from "../../lib/i18n";
import { retentionQueries, usePropose } from "./retention-queries";
import { keptWord } from "./retention-words";

/** The term that counts, and whose it is. */
function Term({ worker }: { worker: FormerWorker }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { keepUntil, ruleSetKey, citation, sourceStatus, leftOn } = worker;
  if (keepUntil === null)
    return <span className="not-assessed">{i18n.t("Nobody can say: no term is known")}</span>;
  return (
    <>
      {formatDate(keepUntil, locale)}
      <span className="visitor-mail">
        {ruleSetKey === null
          ? keepUntil === leftOn
            ? i18n.t("the last day here")
            : i18n.t("the organization’s own term")
          : citation}
        {sourceStatus === "from-memory" && ` (${i18n.t("from memory")})`}
      </span>
    </>
  );
}

function useColumns(): DataColumn<FormerWorker>[] {
  const { i18n } = useLingui();
  const locale = useLocale();
  const count = (value: number) => formatNumber(value, 0, locale);
  return [
    {
      id: "name",
      head: i18n.t("Name"),
      isRowHead: true,
      cell: ({ name, employeeNumber, siteName }) => (
        <>
          <bdi>{name}</bdi>
          <span className="visitor-mail">
            {employeeNumber}, {siteName}
          </span>
        </>
      ),
    },
    { id: "left", head: i18n.t("Left"), cell: ({ leftOn }) => formatDate(leftOn, locale) },
    { id: "until", head: i18n.t("To be kept until"), cell: (worker) => <Term worker={worker} /> },
    {
      id: "records",
      head: i18n.t("Of the person"),
      cell: ({ records }) =>
        i18n.t("letters {letters}, notes {notes}, files {files}", {
          letters: count(records.letters),
          notes: count(records.notes),
          files: count(records.files),
        }),
    },
  ];
}

/** Whose term is over: ticked, and proposed to a second person. */
export function DuePeople({ siteId }: { siteId: string }) {
  const { i18n } = useLingui();
  const people = useInfiniteQuery(retentionQueries.people("due", siteId));
  const rows = people.data?.pages.flatMap((page) => page.rows) ?? [];
  const [ticked, setTicked] = useState<ReadonlySet<string>>(new Set());
  const [isAsking, setIsAsking] = useState(false);
  const [said, setSaid] = useState("");
  const open = rows.filter(({ isProposed }) => !isProposed);
  const chosen = open.filter(({ id }) => ticked.has(id));
  const propose = usePropose(({ waiting }) => {
    setTicked(new Set());
    setIsAsking(false);
    setSaid(
      i18n.t(
        "{count, plural, one {One person proposed. Somebody else approves it below.} other {# people proposed. Somebody else approves it below.}}",
        { count: waiting },
      ),
    );
  });
  const tick = (id: string, isTicked: boolean) =>
    setTicked((before) => {
      const next = new Set(before);
      if (isTicked) next.add(id);
      else next.delete(id);
      return next;
    });
  const columns: DataColumn<FormerWorker>[] = [
    {
      id: "tick",
      head: <span className="sr-only">{i18n.t("Erase")}</span>,
      cell: ({ id, name, isProposed }) =>
        isProposed ? (
          i18n.t("proposed")
        ) : (
          <label className="choice">
            <input
              type="checkbox"
              checked={ticked.has(id)}
              onChange={(event) => tick(id, event.target.checked)}
            />
            <span className="sr-only">{name}</span>
          </label>
        ),
    },
    ...useColumns(),
  ];
  return (
    <>
      <DataTable
        stacksOnPhone
        caption={i18n.t("Whose term is over")}
        columns={columns}
        rows={rows}
        rowKey={({ id }) => id}
        state={people.isPending ? "loading" : people.isError ? "failed" : "ready"}
        error={people.error}
        onRetry={() => void people.refetch()}
        more={{
          hasMore: people.hasNextPage,
          isLoading: people.isFetchingNextPage,
          onMore: () => void people.fetchNextPage(),
        }}
        empty={<Empty title={i18n.t("Nobody’s term is over.")} />}
      />
      {open.length > 0 && (
        <p className="mt-3">
          <Button
            kind="primary"
            aria-disabled={chosen.length === 0}
            onClick={() => chosen.length > 0 && setIsAsking(true)}
          >
            {i18n.t("Propose to erase")}
          </Button>{" "}
          {chosen.length === 0 && i18n.t("Tick whom first.")}
        </p>
      )}
      <p className="mt-3">
        <Status>{said}</Status>
      </p>
      <Dialog
        isOpen={isAsking}
        onClose={() => setIsAsking(false)}
        title={i18n.t(
          "{count, plural, one {Propose to erase one person?} other {Propose to erase # people?}}",
          { count: chosen.length },
        )}
        lead={i18n.t(
          "Name, number, addresses, notes, files and what the trail kept of values go, once a second person approves it. Results stay, under a number that is drawn. It can’t be taken back.",
        )}
        actions={
          <>
            <Button
              kind="primary"
              isBusy={propose.isPending}
              onClick={() => propose.start({ siteId, workerIds: chosen.map(({ id }) => id) })}
            >
              {i18n.t("Propose")}
            </Button>
            <Button onClick={() => setIsAsking(false)}>{i18n.t("Leave as it was")}</Button>
          </>
        }
      >
        {propose.isError && <FormProblem error={propose.error} />}
      </Dialog>
    </>
  );
}

/** Who left and stays in the records, and why. */
export function KeptPeople({ siteId }: { siteId: string }) {
  const { i18n } = useLingui();
  const people = useInfiniteQuery(retentionQueries.people("kept", siteId));
  const columns: DataColumn<FormerWorker>[] = [
    ...useColumns().filter(({ id }) => id !== "records"),
    {
      id: "because",
      head: i18n.t("Kept"),
      cell: ({ keptBecause }) => keptBecause && keptWord(i18n, keptBecause),
    },
  ];
  return (
    <DataTable
      stacksOnPhone
      caption={i18n.t("Who is kept")}
      columns={columns}
      rows={people.data?.pages.flatMap((page) => page.rows) ?? []}
      rowKey={({ id }) => id}
      state={people.isPending ? "loading" : people.isError ? "failed" : "ready"}
      error={people.error}
      onRetry={() => void people.refetch()}
      more={{
        hasMore: people.hasNextPage,
        isLoading: people.isFetchingNextPage,
        onMore: () => void people.fetchNextPage(),
      }}
      empty={<Empty title={i18n.t("Nobody who left is in the records by name.")} />}
    />
  );
}
