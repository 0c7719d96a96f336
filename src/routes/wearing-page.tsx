import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { ButtonLink } from "../components/button";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { hasRole, useUser } from "../features/session/session";
import { wearingQueries } from "../features/wearing/queries";
import { RoundsTable } from "../features/wearing/rounds-table";
import { paths } from "../paths";
import { ProtectorWays } from "./protector-frame";
import { useSiteChoice } from "./site-choice";
import "../styles/worker.css";

/** Rounds and own reports of wearing: an officer's and auditor's of their sites, a supervisor's own. */
export function Component() {
  const { i18n } = useLingui();
  const user = useUser();
  const choice = useSiteChoice();
  const isOffice = hasRole(user, "officer", "auditor");
  const rounds = useInfiniteQuery(wearingQueries.rounds({ siteId: choice.site?.id }));
  const canObserve = hasRole(user, "officer", "supervisor");
  return (
    <>
      <PageBody>
        <PageHead
          way={
            isOffice ? (
              <ProtectorWays />
            ) : (
              <TextLink to={paths.crewSheet}>{i18n.t("Crew sheet")}</TextLink>
            )
          }
          title={i18n.t("Wearing rounds")}
          lead={
            isOffice
              ? i18n.t(
                  "How often people were seen wearing their protectors, task by task. All looks of a year count together.",
                )
              : i18n.t("The rounds that you made, the latest first.")
          }
          actions={
            canObserve && (
              <ButtonLink kind="primary" to={paths.wearingRound}>
                {i18n.t("New round")}
              </ButtonLink>
            )
          }
        />
        {choice.sites.length > 1 && (
          <FilterRow label={i18n.t("What is shown")}>
            <FilterSelect
              label={i18n.t("Site")}
              value={choice.site?.id ?? ""}
              choices={[
                { value: "", label: i18n.t("All sites") },
                ...choice.sites.map(({ id, name }) => ({ value: id, label: name })),
              ]}
              onChange={(id) => choice.choose(id || null)}
            />
          </FilterRow>
        )}
        <RoundsTable
          showsSite={choice.sites.length > 1 && choice.site === null}
          rows={rounds.data?.pages.flatMap((page) => page.rows) ?? []}
          state={rounds.isError && !rounds.data ? "failed" : rounds.data ? "ready" : "loading"}
          error={rounds.error}
          onRetry={() => void rounds.refetch()}
          more={{
            hasMore: rounds.hasNextPage,
            isLoading: rounds.isFetchingNextPage,
            onMore: () => void rounds.fetchNextPage(),
          }}
          empty={
            <Empty title={i18n.t("No round is on record here yet.")}>
              {canObserve && (
                <TextLink to={paths.wearingRound}>{i18n.t("Make the first one")}</TextLink>
              )}
            </Empty>
          }
        />
      </PageBody>
      <Folio>
        {i18n.t("What a round sees is the wearing time of days on which the shift says none.")}
      </Folio>
    </>
  );
}
