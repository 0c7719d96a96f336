import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { formatNumber } from "../../shared/format/number";
import { Button } from "../components/button";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { Status } from "../components/status";
import { MovesTable } from "../features/stock/moves-table";
import { stockQueries } from "../features/stock/queries";
import { ReplacementsTable } from "../features/stock/replacements-table";
import { StockForm } from "../features/stock/stock-form";
import { StockTable } from "../features/stock/stock-table";
import { isShort, moveWord, partWord } from "../features/stock/stock-words";
import { useLocale } from "../lib/i18n";
import { useMoveFocus } from "../lib/move-focus";
import { ProtectorWays } from "./protector-frame";
import { useSiteChoice } from "./site-choice";
import "../styles/stock.css";
import "../styles/worker.css";

/** What the sites have of protectors and their parts, what wants changing, and what came and went. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const choice = useSiteChoice();
  const { site, sites, isOfficer } = choice;
  const siteId = site?.id;
  const there = useQuery(stockQueries.there({ siteId }));
  const due = useInfiniteQuery(stockQueries.replacements({ siteId }));
  const moves = useInfiniteQuery(stockQueries.moves({ siteId }));
  const [isEntering, setEntering] = useState(false);
  const [said, setSaid] = useState("");
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  const showsSite = sites.length > 1 && !site;
  const firstSite = siteId ?? sites[0]?.id ?? "";
  const shortCount = there.data?.filter(isShort).length ?? 0;
  const pageOf = (query: typeof due | typeof moves) => ({
    hasMore: query.hasNextPage,
    isLoading: query.isFetchingNextPage,
    onMore: () => void query.fetchNextPage(),
  });
  const stateOf = ({ data, isError }: { data: unknown; isError: boolean }) =>
    data ? ("ready" as const) : isError ? ("failed" as const) : ("loading" as const);
  return (
    <>
      <PageBody>
        <PageHead
          way={<ProtectorWays />}
          title={i18n.t("Stock")}
          lead={
            there.data &&
            (shortCount > 0
              ? i18n.t("{count, plural, one {Of # kind} other {Of # kinds}} nothing is left.", {
                  count: shortCount,
                })
              : there.data.length > 0
                ? i18n.t("Something is left of everything that was ever in stock.")
                : undefined)
          }
          actions={
            isOfficer &&
            !isEntering && (
              <Button
                kind="primary"
                onClick={() => {
                  setSaid("");
                  setEntering(true);
                  moveFocus("form select, form input");
                }}
              >
                {i18n.t("Enter stock")}
              </Button>
            )
          }
        />
        <div ref={place}>
          <p className="stock-said" tabIndex={-1}>
            <Status>{said}</Status>
          </p>
          {isEntering && (
            <StockForm
              siteId={firstSite}
              sites={sites.map(({ id, name }) => ({ value: id, label: name }))}
              todayAt={choice.todayAt}
              onLeave={() => setEntering(false)}
              onSaved={(move) => {
                setEntering(false);
                setSaid(
                  i18n.t("Saved: {protector}, {part}, {kind}: {count}.", {
                    count: formatNumber(move.quantity, 0, locale),
                    protector: move.modelName,
                    part: partWord(i18n, move.part),
                    kind: moveWord(i18n, move.kind),
                  }),
                );
                moveFocus(".stock-said");
              }}
            />
          )}
        </div>
        {sites.length > 1 && (
          <FilterRow label={i18n.t("What is shown")}>
            <FilterSelect
              label={i18n.t("Site")}
              value={siteId ?? ""}
              choices={[
                { value: "", label: i18n.t("All sites") },
                ...sites.map(({ id, name }) => ({ value: id, label: name })),
              ]}
              onChange={(id) => choice.choose(id || null)}
            />
          </FilterRow>
        )}
        <Section title={i18n.t("What is there")} id="stock">
          <StockTable
            showsSite={showsSite}
            rows={there.data ?? []}
            state={stateOf(there)}
            error={there.error}
            onRetry={() => void there.refetch()}
            empty={
              <Empty title={i18n.t("Nothing was ever entered here.")}>
                {isOfficer && i18n.t("Enter what came in, or what a count finds on the shelf.")}
              </Empty>
            }
          />
        </Section>
        <Section title={i18n.t("Cushions and tips due")} id="replacements">
          <ReplacementsTable
            today={choice.todayAt(firstSite)}
            canChange={isOfficer}
            rows={due.data?.pages.flatMap((page) => page.rows) ?? []}
            state={stateOf(due)}
            error={due.error}
            onRetry={() => void due.refetch()}
            more={pageOf(due)}
            empty={<Empty title={i18n.t("Nothing is due within a month.")} />}
          />
        </Section>
        <Section title={i18n.t("What came and went")} id="moves">
          <MovesTable
            showsSite={showsSite}
            rows={moves.data?.pages.flatMap((page) => page.rows) ?? []}
            state={stateOf(moves)}
            error={moves.error}
            onRetry={() => void moves.refetch()}
            more={pageOf(moves)}
            empty={<Empty title={i18n.t("Nothing has moved yet.")} />}
          />
        </Section>
      </PageBody>
      <Folio>{i18n.t("Protectors, cushions and tips are free of charge to the worker.")}</Folio>
    </>
  );
}
