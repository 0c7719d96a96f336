import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useSearchParams } from "react-router-dom";
import { formatShortDate } from "../../shared/format/date";
import { isolate } from "../../shared/i18n/isolate";
import { IsoDate } from "../../shared/schemas/common";
import type { SharedResult } from "../../shared/schemas/employer-share";
import { type DataColumn, DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { FilterDate, FilterRow } from "../components/filter-row";
import { LevelFigure } from "../components/level-figure";
import { TextButton } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { Verdict } from "../components/verdict";
import { shareQueries } from "../features/employer-shares/queries";
import { apiAddress } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { untilText } from "../lib/until-text";
import "../styles/people.css";

/** A day in the address; what is none narrows nothing. */
const dayIn = (search: URLSearchParams, name: string): string | undefined =>
  IsoDate.safeParse(search.get(name)).data;

/** What somebody of an employer reads: the results of its people, and nothing to be changed. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [search, setSearch] = useSearchParams();
  const [from, to] = [dayIn(search, "from"), dayIn(search, "to")];
  const [cleared, setCleared] = useState(0);
  const narrow = (name: "from" | "to", date: string) =>
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        next.set(name, date);
        return next;
      },
      { replace: true },
    );
  const list = useInfiniteQuery(shareQueries.results({ from, to }));
  const rows = list.data?.pages.flatMap((page) => page.rows) ?? [];
  const shares = list.data?.pages[0]?.shares ?? [];
  const showsSite = new Set(shares.map(({ siteName }) => siteName)).size > 1;
  const columns: DataColumn<SharedResult>[] = [
    {
      id: "date",
      head: i18n.t("Date"),
      cell: ({ date }) => <span className="figure">{formatShortDate(date, locale)}</span>,
    },
    {
      id: "worker",
      head: i18n.t("Worker"),
      isRowHead: true,
      cell: ({ workerName, employeeNumber, siteName }) => (
        <>
          <bdi>{workerName}</bdi>
          <span className="visitor-mail">
            {showsSite ? `${employeeNumber}, ${isolate(siteName)}` : employeeNumber}
          </span>
        </>
      ),
    },
    {
      id: "outside",
      head: i18n.t("Without protection"),
      unit: i18n.t("day, dB"),
      kind: "right",
      cell: ({ outsideDb, outsideBound, uncertaintyDb, verdictOutside }) => (
        <LevelFigure
          levelDb={outsideDb}
          bound={outsideBound}
          uncertaintyDb={outsideBound === "exact" ? uncertaintyDb : null}
        >
          <Verdict verdict={verdictOutside} isQuiet />
        </LevelFigure>
      ),
    },
    {
      id: "at-ear",
      head: i18n.t("At the ear"),
      unit: i18n.t("day, dB"),
      kind: "right",
      cell: ({ atEarDb, atEarBound, verdictAtEar }) => (
        <LevelFigure levelDb={atEarDb} bound={atEarBound} isStrong={atEarDb !== null}>
          <Verdict verdict={verdictAtEar} />
        </LevelFigure>
      ),
    },
    {
      id: "result",
      head: i18n.t("Result id"),
      hidesOnPhone: true,
      cell: ({ resultId }) => <span className="figure result-id">{resultId}</span>,
    },
  ];
  return (
    <>
      <PageBody>
        <PageHead
          title={i18n.t("Results of your people")}
          lead={
            shares.length > 0 &&
            shares.map((share) => (
              <span key={share.id} className="block">
                {i18n.t("{employer} at {site}. Access ends: {time} ({zone}).", {
                  employer: isolate(share.employerName),
                  site: isolate(share.siteName),
                  time: untilText(i18n, share.endsAt, share.timeZone, locale),
                  zone: share.timeZone,
                })}
              </span>
            ))
          }
          actions={
            <a className="link" href={apiAddress("/shared-results.csv")} download>
              {i18n.t("All of it as a file (CSV)")}
            </a>
          }
        />
        {/* Fields keep what is typed: all of them anew once nothing narrows the list any more. */}
        <FilterRow key={cleared} label={i18n.t("Which days")}>
          <FilterDate
            label={i18n.t("From")}
            value={from ?? ""}
            onChoose={(date) => narrow("from", date)}
          />
          <FilterDate
            label={i18n.t("Until")}
            value={to ?? ""}
            onChoose={(date) => narrow("to", date)}
          />
          {(from || to) && (
            <TextButton
              onClick={() => {
                setSearch({}, { replace: true });
                setCleared((times) => times + 1);
              }}
            >
              {i18n.t("All days")}
            </TextButton>
          )}
        </FilterRow>
        <DataTable
          caption={i18n.t("Results of your people")}
          columns={columns}
          rows={rows}
          rowKey={({ resultId }) => resultId}
          state={list.isSuccess ? "ready" : list.isError ? "failed" : "loading"}
          error={list.error}
          onRetry={() => void list.refetch()}
          stacksOnPhone
          more={{
            hasMore: list.hasNextPage,
            isLoading: list.isFetchingNextPage,
            onMore: () => void list.fetchNextPage(),
          }}
          empty={
            <Empty
              title={
                from || to
                  ? i18n.t("No result of your people is on record for these days.")
                  : i18n.t("No result of your people is on record yet.")
              }
            />
          }
        />
      </PageBody>
      <Folio
        caution={i18n.t(
          "Results that hold today. Each person named here can see that you read them.",
        )}
      />
    </>
  );
}
