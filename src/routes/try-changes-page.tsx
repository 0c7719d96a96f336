import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useSearchParams } from "react-router-dom";
import type { PlanScope } from "../../shared/schemas/plan";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { jobQueries } from "../features/jobs/queries";
import { planQueries } from "../features/planning/queries";
import { TryChanges } from "../features/planning/try-changes";
import { references } from "../lib/references";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";
import "../styles/planning.css";

const KINDS = ["worker", "job", "area"] as const;

/** What would become of a worker's, a group's or an area's days if something were done otherwise. */
export function Component() {
  const { i18n } = useLingui();
  const [search, setSearch] = useSearchParams();
  const choice = useSiteChoice();
  const siteId = choice.site?.id ?? choice.sites[0]?.id ?? "";
  const ask = (query: Record<string, string>) =>
    setSearch(Object.entries(query).filter(([, id]) => id !== ""));
  const scopeKind = KINDS.find((kind) => search.get(kind));
  const scope: PlanScope | null = scopeKind
    ? { scopeKind, scopeId: search.get(scopeKind) ?? "" }
    : null;
  const areas = useQuery(references.areas(siteId));
  const jobs = useQuery(jobQueries.list(siteId));
  const { data, error, refetch, isPending } = useQuery(planQueries.subject(scope));
  return (
    <>
      <PageBody>
        <PageHead
          way={<TextLink to={paths.plans}>{i18n.t("Plans")}</TextLink>}
          title={
            data ? i18n.t("Try changes: {name}", { name: data.scope.name }) : i18n.t("Try changes")
          }
          lead={i18n.t(
            "What would become of the days of these people if something were done otherwise. Nothing on record changes.",
          )}
        />
        <FilterRow label={i18n.t("Whose days")}>
          {choice.sites.length > 1 && (
            <FilterSelect
              label={i18n.t("Site")}
              value={siteId}
              choices={choice.sites.map(({ id, name }) => ({ value: id, label: name }))}
              onChange={(id) => ask({ site: id })}
            />
          )}
          <FilterSelect
            label={i18n.t("Group, by job")}
            value={search.get("job") ?? ""}
            choices={[{ value: "", label: i18n.t("Choose one") }, ...inUse(jobs.data?.rows)]}
            onChange={(id) => ask({ site: siteId, job: id })}
          />
          <FilterSelect
            label={i18n.t("or area")}
            value={search.get("area") ?? ""}
            choices={[{ value: "", label: i18n.t("Choose one") }, ...inUse(areas.data?.rows)]}
            onChange={(id) => ask({ site: siteId, area: id })}
          />
          <TextLink to={paths.workers}>{i18n.t("For one worker: from the worker’s page")}</TextLink>
        </FilterRow>
        {scope === null ? (
          <Empty title={i18n.t("Nothing is tried yet.")}>
            {i18n.t(
              "Choose a group or an area: the nominal days of its people are what is tried on.",
            )}
          </Empty>
        ) : error ? (
          <Failed error={error} onRetry={() => void refetch()} />
        ) : isPending ? (
          <span className="loading-line" />
        ) : (
          <TryChanges key={`${data.scope.scopeKind} ${data.scope.scopeId}`} subject={data} />
        )}
      </PageBody>
      <Folio>
        {i18n.t(
          "Nominal day, today’s levels, protectors and own fits, wearing time as last recorded; time without a task like the rest. Levels rest on the tasks: a reading is a day’s own.",
        )}
      </Folio>
    </>
  );
}

const inUse = (rows: readonly { id: string; name: string; isArchived: boolean }[] = []) =>
  rows.filter(({ isArchived }) => !isArchived).map(({ id, name }) => ({ value: id, label: name }));
