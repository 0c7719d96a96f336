import { useLingui } from "@lingui/react";
import { keepPreviousData, useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { useDeferredValue, useState } from "react";
import { useSearchParams } from "react-router-dom";
import { ButtonLink } from "../components/button";
import { Empty } from "../components/empty";
import { FilterCheck, FilterRow, FilterSelect, FilterText } from "../components/filter-row";
import { TextButton } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { crewQueries } from "../features/crews/queries";
import { hasRole, useUser } from "../features/session/session";
import { workerQueries } from "../features/workers/queries";
import { WorkersTable } from "../features/workers/workers-table";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";
import "../styles/findings.css";

export function Component() {
  const { i18n } = useLingui();
  const user = useUser();
  const { todayAt } = useSiteChoice();
  const [search, setSearch] = useSearchParams();
  const [typed, setTyped] = useState(search.get("search") ?? "");
  const asked = useDeferredValue(typed.trim());
  const siteId = user.sites.find(({ id }) => id === search.get("site"))?.id;
  const crewId = search.get("crew") ?? undefined;
  const includeLeft = search.get("left") === "true";
  /** Crews and the trainings' page are the office's; a visitor reads what of them belongs to a worker's year. */
  const isOffice = hasRole(user, "officer", "auditor");
  const crews = useQuery({ ...crewQueries.list(), enabled: isOffice });
  const list = useInfiniteQuery({
    ...workerQueries.list({ search: asked, siteId, crewId, includeLeft }),
    placeholderData: keepPreviousData,
  });
  const rows = list.data?.pages.flatMap((page) => page.rows) ?? [];
  const isNarrowed = asked !== "" || siteId !== undefined || crewId !== undefined;

  function narrow(name: string, value: string) {
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        if (value === "") next.delete(name);
        else next.set(name, value);
        // A crew belongs to one site.
        if (name === "site") next.delete("crew");
        return next;
      },
      { replace: true },
    );
  }

  const choices = (crews.data?.rows ?? []).filter(
    (crew) => !crew.isArchived && (siteId === undefined || crew.siteId === siteId),
  );
  return (
    <>
      <PageBody>
        <PageHead
          title={i18n.t("Workers")}
          lead={i18n.t("Everyone on record, with the last day entered.")}
          actions={
            <>
              {hasRole(user, "officer") && (
                <>
                  <ButtonLink kind="primary" to={paths.newWorker}>
                    {i18n.t("New worker")}
                  </ButtonLink>
                  <ButtonLink to={paths.roster}>{i18n.t("Roster from a file")}</ButtonLink>
                  <ButtonLink to={paths.retention}>{i18n.t("Keeping and erasing")}</ButtonLink>
                </>
              )}
              {isOffice && <ButtonLink to={paths.trainings}>{i18n.t("Training")}</ButtonLink>}
              {isOffice && (
                <ButtonLink to={paths.employers}>{i18n.t("Agencies and contractors")}</ButtonLink>
              )}
            </>
          }
        />
        <FilterRow label={i18n.t("Narrow the workers")}>
          <FilterText
            label={i18n.t("Name or number")}
            value={typed}
            onChange={(value) => {
              setTyped(value);
              narrow("search", value.trim());
            }}
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
          {isOffice && (
            <FilterSelect
              label={i18n.t("Crew")}
              value={crewId ?? ""}
              onChange={(value) => narrow("crew", value)}
              choices={[
                { value: "", label: i18n.t("Any crew") },
                ...choices.map(({ id, name }) => ({ value: id, label: name })),
              ]}
            />
          )}
          <FilterCheck
            label={i18n.t("also those who left")}
            isChecked={includeLeft}
            onChange={(isChecked) => narrow("left", isChecked ? "true" : "")}
          />
        </FilterRow>
        <WorkersTable
          rows={rows}
          showsSite={user.sites.length > 1 && siteId === undefined}
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
            isNarrowed ? (
              <Empty title={i18n.t("Nobody by that name, number, crew or site.")}>
                <TextButton
                  onClick={() => {
                    setTyped("");
                    setSearch({}, { replace: true });
                  }}
                >
                  {i18n.t("Show everyone")}
                </TextButton>
              </Empty>
            ) : (
              <Empty title={i18n.t("No worker is on record yet.")}>
                {i18n.t("Add one, or import shifts with their workers.")}
              </Empty>
            )
          }
        />
      </PageBody>
      <Folio>
        {i18n.t(
          "At the ear and without protection: the last day on record, by the rule set of its date.",
        )}
      </Folio>
    </>
  );
}
