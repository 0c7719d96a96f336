import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { useSearchParams } from "react-router-dom";
import { LetterFilter } from "../../shared/schemas/letter";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { Folio, PageBody, PageHead } from "../components/page";
import { LettersTable } from "../features/letters/letters-table";
import { letterQueries } from "../features/letters/queries";
import { OfficeLink } from "../features/session/office-link";
import { useUser } from "../features/session/session";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";
import "../styles/findings.css";

const SHOWN = LetterFilter.shape.show;

/** Results told to the workers they were measured on: what is to be printed, what went, and what was acknowledged. */
export function Component() {
  const { i18n } = useLingui();
  const user = useUser();
  const { sites, site, choose } = useSiteChoice();
  const [search, setSearch] = useSearchParams();
  const show = SHOWN.catch("open").parse(search.get("show") ?? "open");
  const list = useInfiniteQuery(letterQueries.list({ show, siteId: site?.id }));
  const rows = list.data?.pages.flatMap((page) => page.rows) ?? [];
  return (
    <>
      <PageBody>
        <PageHead
          way={<OfficeLink to={paths.findings}>{i18n.t("Findings")}</OfficeLink>}
          title={i18n.t("Letters of results")}
          lead={i18n.t(
            "Whoever was measured at or over an action value is told the result: by mail, or on paper where no address is known.",
          )}
        />
        <FilterRow label={i18n.t("Narrow the letters")}>
          <FilterSelect
            label={i18n.t("Show")}
            value={show}
            onChange={(value) =>
              setSearch(
                (before) => {
                  const next = new URLSearchParams(before);
                  if (value === "open") next.delete("show");
                  else next.set("show", value);
                  return next;
                },
                { replace: true },
              )
            }
            choices={[
              { value: "open", label: i18n.t("Not acknowledged") },
              { value: "acknowledged", label: i18n.t("Acknowledged") },
              { value: "all", label: i18n.t("All") },
            ]}
          />
          {sites.length > 1 && (
            <FilterSelect
              label={i18n.t("Site")}
              value={site?.id ?? ""}
              onChange={(value) => choose(value || null)}
              choices={[
                { value: "", label: i18n.t("All sites") },
                ...sites.map(({ id, name }) => ({ value: id, label: name })),
              ]}
            />
          )}
        </FilterRow>
        <LettersTable
          rows={rows}
          timeZoneOf={(id) => user.sites.find((one) => one.id === id)?.timeZone ?? "UTC"}
          state={list.isSuccess ? "ready" : list.isError ? "failed" : "loading"}
          error={list.error}
          onRetry={() => void list.refetch()}
          more={{
            hasMore: list.hasNextPage,
            isLoading: list.isFetchingNextPage,
            onMore: () => void list.fetchNextPage(),
          }}
          empty={
            <Empty title={show === "open" ? i18n.t("No letter waits.") : i18n.t("No such letter.")}>
              {i18n.t(
                "A letter is written by itself within a minute after a day is saved that was measured on a worker and reached an action value.",
              )}
            </Empty>
          }
        />
      </PageBody>
      <Folio>
        {i18n.t(
          "Measured on the worker, against the action values of the rule set that governs the site; one letter a week at most, unless one is due before.",
        )}
      </Folio>
    </>
  );
}
