import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useSearchParams } from "react-router-dom";
import { isolate } from "../../shared/i18n/isolate";
import { timetableGoals } from "../../shared/planning/slot-shares";
import { ruleSetVersion } from "../../shared/rule-sets";
import type { TimetableScope } from "../../shared/schemas/timetable";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { crewQueries } from "../features/crews/queries";
import { jobQueries } from "../features/jobs/queries";
import { TimetableForm } from "../features/planning/timetable-form";
import { timetableQueries } from "../features/planning/timetable-queries";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";
import "../styles/planning.css";

const KINDS = ["crew", "job"] as const;

/** What a timetable of people over tasks is to keep to. */
export function Component() {
  const { i18n } = useLingui();
  const [search, setSearch] = useSearchParams();
  const choice = useSiteChoice();
  const siteId = choice.site?.id ?? choice.sites[0]?.id ?? "";
  const ask = (query: Record<string, string>) =>
    setSearch(Object.entries(query).filter(([, id]) => id !== ""));
  const scopeKind = KINDS.find((kind) => search.get(kind));
  const scope: TimetableScope | null = scopeKind
    ? { scopeKind, scopeId: search.get(scopeKind) ?? "" }
    : null;
  const crews = useQuery(crewQueries.list(siteId));
  const jobs = useQuery(jobQueries.list(siteId));
  const { data, error, refetch, isPending } = useQuery(
    timetableQueries.subject(scope, search.get("goal"), null),
  );
  const governing = data && ruleSetVersion(data.ruleSetKey, data.ruleSetVersion);
  return (
    <>
      <PageBody>
        <PageHead
          way={<TextLink to={paths.plans}>{i18n.t("Plans")}</TextLink>}
          title={
            data ? i18n.t("Timetable: {name}", { name: data.scope.name }) : i18n.t("Timetable")
          }
          lead={i18n.t(
            "Who does what when, so that nobody is over and the largest dose is as small as it can be.",
          )}
        />
        <FilterRow label={i18n.t("For whom")}>
          {choice.sites.length > 1 && (
            <FilterSelect
              label={i18n.t("Site")}
              value={siteId}
              choices={choice.sites.map(({ id, name }) => ({ value: id, label: name }))}
              onChange={(id) => ask({ site: id })}
            />
          )}
          <FilterSelect
            label={i18n.t("Crew")}
            value={search.get("crew") ?? ""}
            choices={[{ value: "", label: i18n.t("Choose one") }, ...inUse(crews.data?.rows)]}
            onChange={(id) => ask({ site: siteId, crew: id })}
          />
          <FilterSelect
            label={i18n.t("or group, by job")}
            value={search.get("job") ?? ""}
            choices={[{ value: "", label: i18n.t("Choose one") }, ...inUse(jobs.data?.rows)]}
            onChange={(id) => ask({ site: siteId, job: id })}
          />
          {governing && scope && (
            <FilterSelect
              label={i18n.t("Limit")}
              value={data.goal}
              choices={timetableGoals(governing).map(({ id, label }) => ({
                value: id,
                label: i18n._(label),
              }))}
              onChange={(goal) => ask({ site: siteId, [scope.scopeKind]: scope.scopeId, goal })}
            />
          )}
        </FilterRow>
        {scope === null ? (
          <Empty title={i18n.t("No crew is chosen yet.")}>
            {i18n.t("Choose a crew or a group: its people are those that the timetable is for.")}
          </Empty>
        ) : error ? (
          <Failed error={error} onRetry={() => void refetch()} />
        ) : isPending ? (
          <span className="loading-line" />
        ) : data.people.length === 0 ? (
          <Empty title={i18n.t("Nobody of them has a nominal day.")}>
            {i18n.t("Give the group a nominal day first, under Rules, Jobs.")}
          </Empty>
        ) : (
          <>
            <TimetableForm
              key={`${data.scope.scopeKind} ${data.scope.scopeId} ${data.goal}`}
              subject={data}
            />
            {data.withoutDay.length > 0 && (
              <p className="beneath">
                {i18n.t("Without a nominal day, and so not in it: {names}.", {
                  names: data.withoutDay.map(({ name }) => isolate(name)).join(", "),
                })}
              </p>
            )}
          </>
        )}
      </PageBody>
      <Folio>
        {i18n.t(
          "Slots of 15 minutes. Each task’s dose by its level on record today, with the protector that this person would wear there, by the record’s own arithmetic; where it is not certain, the most that it can be.",
        )}
      </Folio>
    </>
  );
}

const inUse = (rows: readonly { id: string; name: string; isArchived: boolean }[] = []) =>
  rows.filter(({ isArchived }) => !isArchived).map(({ id, name }) => ({ value: id, label: name }));
