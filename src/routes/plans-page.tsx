import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { useState } from "react";
import { formatInstant } from "../../shared/format/date";
import { formatLevel } from "../../shared/format/level";
import { isolate } from "../../shared/i18n/isolate";
import { ruleSetVersion } from "../../shared/rule-sets";
import type { PlanRow } from "../../shared/schemas/plan";
import { ButtonLink } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { CountsLine } from "../features/planning/counts-line";
import { planQueries } from "../features/planning/queries";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";
import "../styles/planning.css";

/** Plans side by side: for whom, what they promise, and when they were kept. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const choice = useSiteChoice();
  const [state, setState] = useState<"kept" | "all">("kept");
  const plans = useInfiniteQuery(planQueries.list({ siteId: choice.site?.id, state }));
  const { timeZone = "UTC" } = choice.site ?? choice.sites[0] ?? {};
  return (
    <>
      <PageBody>
        <PageHead
          title={i18n.t("Plans")}
          lead={i18n.t("Changes that were tried and kept, with what they are expected to do.")}
          actions={
            choice.isOfficer && (
              <>
                <ButtonLink to={paths.newTimetable}>{i18n.t("Timetable")}</ButtonLink>
                <ButtonLink kind="primary" to={paths.tryChanges}>
                  {i18n.t("Try changes")}
                </ButtonLink>
              </>
            )
          }
        />
        <FilterRow label={i18n.t("What is shown")}>
          {choice.sites.length > 1 && (
            <FilterSelect
              label={i18n.t("Site")}
              value={choice.site?.id ?? ""}
              choices={[
                { value: "", label: i18n.t("All") },
                ...choice.sites.map(({ id, name }) => ({ value: id, label: name })),
              ]}
              onChange={(id) => choice.choose(id || null)}
            />
          )}
          <FilterSelect
            label={i18n.t("Plans")}
            value={state}
            choices={[
              { value: "kept", label: i18n.t("that are followed") },
              { value: "all", label: i18n.t("and those put aside") },
            ]}
            onChange={(value) => setState(value === "all" ? "all" : "kept")}
          />
        </FilterRow>
        <DataTable<PlanRow>
          caption={i18n.t("Plans, the latest first")}
          rows={plans.data?.pages.flatMap((page) => page.rows) ?? []}
          rowKey={({ id }) => id}
          state={plans.isError ? "failed" : plans.data ? "ready" : "loading"}
          error={plans.error}
          onRetry={() => void plans.refetch()}
          more={{
            hasMore: plans.hasNextPage,
            isLoading: plans.isFetchingNextPage,
            onMore: () => void plans.fetchNextPage(),
          }}
          empty={
            <Empty title={i18n.t("No plan has been kept yet.")}>
              {choice.isOfficer && i18n.t("Try changes for a group, and keep what serves.")}
            </Empty>
          }
          isTwoLine
          stacksOnPhone
          columns={[
            {
              id: "name",
              head: i18n.t("Plan"),
              isRowHead: true,
              cell: ({ id, name, scope, putAsideReason }) => (
                <span className="two-lines">
                  <TextLink to={paths.plan(id)}>{name}</TextLink>
                  <span className="beneath">
                    {[scope.name, scope.siteName, putAsideReason !== null && i18n.t("put aside")]
                      .filter(Boolean)
                      .join(", ")}
                  </span>
                </span>
              ),
            },
            {
              id: "goal",
              head: i18n.t("Everybody Under"),
              cell: ({
                kind,
                goal,
                ruleSetKey,
                ruleSetVersion: version,
                changesCount,
                stepsOpen,
                stepsCount,
              }) => (
                <span className="two-lines">
                  {goalWord(i18n._.bind(i18n), ruleSetKey, version, goal)}
                  <span className="beneath">
                    {[
                      kind === "timetable"
                        ? i18n.t("timetable")
                        : i18n.t("{count, plural, one {# change} other {# changes}}", {
                            count: changesCount,
                          }),
                      stepsCount > 0 &&
                        i18n.t("{open} of {count} steps open", {
                          open: stepsOpen,
                          count: stepsCount,
                        }),
                    ]
                      .filter(Boolean)
                      .join(", ")}
                  </span>
                </span>
              ),
            },
            {
              id: "people",
              head: i18n.t("People, now → then"),
              cell: ({ before, after }) => <CountsLine before={before} after={after} />,
            },
            {
              id: "worst",
              head: i18n.t("Loudest day then"),
              unit: i18n.t("outside, at the ear, dB"),
              kind: "figure",
              cell: ({ worstOutsideDb, worstAtEarDb }) =>
                `${formatLevel(worstOutsideDb, locale)}, ${formatLevel(worstAtEarDb, locale)}`,
            },
            {
              id: "kept",
              head: i18n.t("Kept"),
              hidesOnPhone: true,
              cell: ({ keptAt, authorName }) => (
                <span className="two-lines">
                  {formatInstant(keptAt, timeZone, locale)}
                  {authorName && <span className="beneath">{isolate(authorName)}</span>}
                </span>
              ),
            },
          ]}
        />
      </PageBody>
      <Folio>
        {i18n.t(
          "What a plan promises is what the record’s own arithmetic said on the day it was kept.",
        )}
      </Folio>
    </>
  );
}

function goalWord(
  translate: (label: string) => string,
  key: string,
  version: number,
  goal: string,
): string {
  const label = ruleSetVersion(key, version)?.criteria.find(({ id }) => id === goal)?.label;
  return label === undefined ? goal : translate(label);
}
