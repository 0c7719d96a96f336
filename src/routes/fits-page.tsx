import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { ButtonLink } from "../components/button";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { FitDistribution } from "../features/fits/fit-distribution";
import { FitTestsTable } from "../features/fits/fit-tests-table";
import { IssuesTable } from "../features/fits/issues-table";
import { fitQueries } from "../features/fits/queries";
import { paths } from "../paths";
import { ProtectorWays } from "./protector-frame";
import { useSiteChoice } from "./site-choice";
import "../styles/findings.css";
import "../styles/fits.css";
import "../styles/worker.css";

/** A site's fits: by model against the label, one by one, and what was handed out. */
export function Component() {
  const { i18n } = useLingui();
  const choice = useSiteChoice();
  const site = choice.site ?? choice.sites[0];
  const siteId = site?.id ?? "";
  const distribution = useQuery({ ...fitQueries.distribution(siteId), enabled: siteId !== "" });
  const tests = useInfiniteQuery({ ...fitQueries.tests({ siteId }), enabled: siteId !== "" });
  const issues = useInfiniteQuery({ ...fitQueries.issues({ siteId }), enabled: siteId !== "" });
  return (
    <>
      <PageBody>
        <PageHead
          way={<ProtectorWays />}
          title={i18n.t("Fit tests")}
          lead={i18n.t(
            "What protectors take off on the people who wear them, beside what their labels say.",
          )}
          actions={
            choice.isOfficer && (
              <ButtonLink kind="primary" to={paths.fitting}>
                {i18n.t("Fit and issue")}
              </ButtonLink>
            )
          }
        />
        {choice.sites.length > 1 && (
          <FilterRow label={i18n.t("What is shown")}>
            <FilterSelect
              label={i18n.t("Site")}
              value={siteId}
              choices={choice.sites.map(({ id, name }) => ({ value: id, label: name }))}
              onChange={choice.choose}
            />
          </FilterRow>
        )}
        <Section title={i18n.t("Against the label")} id="against-label">
          <FitDistribution
            rows={distribution.data ?? []}
            state={distribution.isError ? "failed" : distribution.data ? "ready" : "loading"}
            error={distribution.error}
            onRetry={() => void distribution.refetch()}
          />
          <p className="picture-legend">
            {i18n.t(
              "A tick is one person’s PAR, the upright the label’s figure for a level in dB(A), the caret the mean. The latest fit of each person and protector counts.",
            )}
          </p>
        </Section>
        <Section title={i18n.t("Fit by fit")} id="fit-tests">
          <FitTestsTable
            rows={tests.data?.pages.flatMap((page) => page.rows) ?? []}
            state={tests.isError ? "failed" : tests.data ? "ready" : "loading"}
            error={tests.error}
            onRetry={() => void tests.refetch()}
            more={{
              hasMore: tests.hasNextPage,
              isLoading: tests.isFetchingNextPage,
              onMore: () => void tests.fetchNextPage(),
            }}
            empty={<Empty title={i18n.t("No fit is on record here yet.")} />}
          />
        </Section>
        <Section title={i18n.t("Handed out")} id="issues">
          <IssuesTable
            today={choice.todayAt(siteId)}
            rows={issues.data?.pages.flatMap((page) => page.rows) ?? []}
            state={issues.isError ? "failed" : issues.data ? "ready" : "loading"}
            error={issues.error}
            onRetry={() => void issues.refetch()}
            more={{
              hasMore: issues.hasNextPage,
              isLoading: issues.isFetchingNextPage,
              onMore: () => void issues.fetchNextPage(),
            }}
            empty={<Empty title={i18n.t("Nothing has been handed out here yet.")} />}
          />
        </Section>
      </PageBody>
      <Folio>
        {i18n.t("PAR: personal attenuation rating, at the site’s confidence when it was tested.")}
      </Folio>
    </>
  );
}
