import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { useSearchParams } from "react-router-dom";
import { findingWord } from "../../shared/findings/words";
import { FINDING_KINDS, FindingFilter, FindingKind } from "../../shared/schemas/finding";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { FindingsTable } from "../features/findings/findings-table";
import { findingQueries } from "../features/findings/queries";
import { useUser } from "../features/session/session";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";
import "../styles/findings.css";

const STATES = FindingFilter.shape.state;

export function Component() {
  const { i18n } = useLingui();
  const user = useUser();
  const { todayAt } = useSiteChoice();
  const [search, setSearch] = useSearchParams();
  const state = STATES.catch("open").parse(search.get("state") ?? "open");
  const kind = FindingKind.safeParse(search.get("kind")).data;
  const siteId = user.sites.find(({ id }) => id === search.get("site"))?.id;
  const list = useInfiniteQuery(findingQueries.list({ state, kind, siteId }));
  const rows = list.data?.pages.flatMap((page) => page.rows) ?? [];
  const isNarrowed = kind !== undefined || siteId !== undefined;

  function narrow(name: string, value: string) {
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        if (value === "") next.delete(name);
        else next.set(name, value);
        return next;
      },
      { replace: true },
    );
  }

  return (
    <>
      <PageBody>
        <PageHead
          title={i18n.t("Findings")}
          lead={i18n.t(
            "What the program noticed and a person must act on. Overdue ones stand first, then the soonest due; of those due on one day the worst at the top.",
          )}
          actions={<TextLink to={paths.letters}>{i18n.t("Letters of results")}</TextLink>}
        />
        <FilterRow label={i18n.t("Narrow the findings")}>
          <FilterSelect
            label={i18n.t("State")}
            value={state}
            onChange={(value) => narrow("state", value === "open" ? "" : value)}
            choices={[
              { value: "open", label: i18n.t("Open") },
              { value: "done", label: i18n.t("Done, to be checked") },
              { value: "closed", label: i18n.t("Closed") },
              { value: "all", label: i18n.t("All") },
            ]}
          />
          <FilterSelect
            label={i18n.t("Kind")}
            value={kind ?? ""}
            onChange={(value) => narrow("kind", value)}
            choices={[
              { value: "", label: i18n.t("Any kind") },
              ...FINDING_KINDS.map((one) => ({ value: one, label: findingWord(i18n, one) })),
            ]}
          />
          {user.sites.length > 1 && (
            <FilterSelect
              label={i18n.t("Site")}
              value={siteId ?? ""}
              onChange={(value) => narrow("site", value)}
              choices={[
                { value: "", label: i18n.t("All sites") },
                ...user.sites.map(({ id, name }) => ({ value: id, label: name })),
              ]}
            />
          )}
        </FilterRow>
        <FindingsTable
          rows={rows}
          todayAt={todayAt}
          state={list.isSuccess ? "ready" : list.isError ? "failed" : "loading"}
          error={list.error}
          onRetry={() => void list.refetch()}
          more={{
            hasMore: list.hasNextPage,
            isLoading: list.isFetchingNextPage,
            onMore: () => void list.fetchNextPage(),
          }}
          empty={
            <Empty
              title={
                isNarrowed
                  ? i18n.t("No finding of that kind.")
                  : state === "open"
                    ? i18n.t("No finding is open.")
                    : i18n.t("No such finding.")
              }
            >
              {isNarrowed
                ? i18n.t("Choose another kind, state or site above.")
                : i18n.t(
                    "Findings come from the days that are entered; each day is judged as it is saved.",
                  )}
            </Empty>
          }
        />
      </PageBody>
      <Folio>{i18n.t("Findings come from the governing rule set of each site only.")}</Folio>
    </>
  );
}
