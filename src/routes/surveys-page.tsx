import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { useSearchParams } from "react-router-dom";
import type { z } from "zod";
import { formatShortDate } from "../../shared/format/date";
import { type SurveyRow, SurveyState } from "../../shared/schemas/survey";
import { stateTitle, strategyTitle } from "../../shared/surveys/words";
import { ButtonLink } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { surveyQueries } from "../features/surveys/queries";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { MeasuringWays } from "./measuring-frame";
import { useSiteChoice } from "./site-choice";
import "../styles/surveys.css";

type Row = z.infer<typeof SurveyRow>;

export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const choice = useSiteChoice();
  const [search, setSearch] = useSearchParams();
  const state = SurveyState.safeParse(search.get("state")).data;
  const list = useInfiniteQuery(surveyQueries.list({ siteId: choice.site?.id, state }));
  const rows = list.data?.pages.flatMap((page) => page.rows) ?? [];
  const narrow = (name: string, value: string) =>
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        if (value === "") next.delete(name);
        else next.set(name, value);
        return next;
      },
      { replace: true },
    );
  return (
    <>
      <PageBody>
        <PageHead
          way={<MeasuringWays />}
          title={i18n.t("Surveys")}
          lead={i18n.t("Runs taken for one purpose, with one strategy, on the workers of one job.")}
          actions={
            choice.isOfficer && (
              <ButtonLink kind="primary" to={paths.newSurvey}>
                {i18n.t("New survey")}
              </ButtonLink>
            )
          }
        />
        <FilterRow label={i18n.t("Narrow the surveys")}>
          {choice.sites.length > 1 && (
            <FilterSelect
              label={i18n.t("Site")}
              value={choice.site?.id ?? ""}
              onChange={(value) => narrow("site", value)}
              choices={[
                { value: "", label: i18n.t("All sites") },
                ...choice.sites.map(({ id, name }) => ({ value: id, label: name })),
              ]}
            />
          )}
          <FilterSelect
            label={i18n.t("State")}
            value={state ?? ""}
            onChange={(value) => narrow("state", value)}
            choices={[
              { value: "", label: i18n.t("Any state") },
              ...SurveyState.options.map((one) => ({ value: one, label: stateTitle(i18n, one) })),
            ]}
          />
        </FilterRow>
        <DataTable<Row>
          caption={i18n.t("Surveys, the latest first")}
          rows={rows}
          rowKey={({ id }) => id}
          isTwoLine
          stacksOnPhone
          state={list.isSuccess ? "ready" : list.isError ? "failed" : "loading"}
          error={list.error}
          onRetry={() => void list.refetch()}
          more={{
            hasMore: list.hasNextPage,
            isLoading: list.isFetchingNextPage,
            onMore: () => void list.fetchNextPage(),
          }}
          empty={
            <Empty title={i18n.t("No survey yet.")}>
              {i18n.t("What needs measuring stands under")}{" "}
              <TextLink to={paths.toMeasure}>{i18n.t("To be measured")}</TextLink>.
            </Empty>
          }
          columns={[
            {
              id: "name",
              head: i18n.t("Survey"),
              isRowHead: true,
              cell: ({ id, name, state: itsState }) => (
                <span className="two-lines">
                  <TextLink to={paths.survey(id)}>{name}</TextLink>
                  <span className="beneath">{stateTitle(i18n, itsState)}</span>
                </span>
              ),
            },
            {
              id: "group",
              head: i18n.t("Group"),
              cell: ({ jobId, jobName, siteId }) => (
                <span className="two-lines">
                  <TextLink className="is-quiet" to={paths.group(jobId)}>
                    {jobName}
                  </TextLink>
                  <span className="beneath">{choice.siteName(siteId)}</span>
                </span>
              ),
            },
            {
              id: "strategy",
              head: i18n.t("Strategy"),
              cell: ({ strategy }) => strategyTitle(i18n, strategy),
            },
            {
              id: "dates",
              head: i18n.t("From, to"),
              cell: ({ fromDate, toDate }) =>
                i18n.t("{from} to {to}", {
                  from: formatShortDate(fromDate, locale),
                  to: formatShortDate(toDate, locale),
                }),
            },
            {
              id: "samples",
              head: i18n.t("Samples"),
              unit: i18n.t("there, of planned"),
              kind: "figure",
              cell: ({ samplesCount, wantedCount }) => `${samplesCount} / ${wantedCount}`,
            },
          ]}
        />
      </PageBody>
      <Folio>
        {i18n.t(
          "ISO 9612:2009. A survey’s result is adopted by an officer; nothing changes by itself.",
        )}
      </Folio>
    </>
  );
}
