import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useNavigate, useParams, useSearchParams } from "react-router-dom";
import { Strategy, type SurveyDetail } from "../../shared/schemas/survey";
import { Button } from "../components/button";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { Folio, PageBody, PageHead } from "../components/page";
import { jobQueries } from "../features/jobs/queries";
import { surveyQueries } from "../features/surveys/queries";
import { SurveyForm } from "../features/surveys/survey-form";
import { paths } from "../paths";
import { MeasuringWays } from "./measuring-frame";
import { useSiteChoice } from "./site-choice";
import "../styles/surveys.css";

/** A new survey of a group, half filled in, or the change of one. */
export function Component() {
  const { id } = useParams();
  const { data, error, refetch } = useQuery({
    ...surveyQueries.one(id ?? ""),
    enabled: id !== undefined,
  });
  const { i18n } = useLingui();
  if (id === undefined) return <NewSurvey />;
  if (data) return <Planned survey={data} siteId={data.siteId} jobId={data.jobId} />;
  return (
    <PageBody>
      <PageHead
        way={<MeasuringWays />}
        title={i18n.t("Survey")}
        lead={error ? undefined : <span className="loading-line" />}
      />
      {error && <Failed error={error} onRetry={() => void refetch()} />}
    </PageBody>
  );
}

function NewSurvey() {
  const { i18n } = useLingui();
  const choice = useSiteChoice();
  const [search, setSearch] = useSearchParams();
  const jobs = useQuery(jobQueries.list());
  const groups = (jobs.data?.rows ?? []).filter(({ isArchived, can }) => !isArchived && can.change);
  const job = groups.find(({ id }) => id === search.get("job"));
  const strategy = Strategy.safeParse(search.get("strategy")).data;
  const [isDirty, setDirty] = useState(false);
  const [asked, setAsked] = useState<string | null>(null);
  const choose = (next: string) => {
    setAsked(null);
    setDirty(false);
    setSearch(next === "" ? {} : { job: next }, { replace: true });
  };
  const choices = (
    <>
      <FilterRow label={i18n.t("Which group")}>
        <FilterSelect
          label={i18n.t("Group")}
          value={job?.id ?? ""}
          choices={[
            { value: "", label: i18n.t("Choose a group") },
            ...groups.map(({ id, name, siteId }) => ({
              value: id,
              label: choice.sites.length > 1 ? `${name}, ${choice.siteName(siteId)}` : name,
            })),
          ]}
          onChange={(next) => (isDirty ? setAsked(next) : choose(next))}
        />
      </FilterRow>
      {asked !== null && (
        <div className="survey-leave" role="alert">
          <p>{i18n.t("Another group starts a new plan: what you typed here is not kept.")}</p>
          <Button onClick={() => choose(asked)}>{i18n.t("Change the group")}</Button>
          <Button onClick={() => setAsked(null)}>{i18n.t("Stay with this one")}</Button>
        </div>
      )}
    </>
  );
  if (job)
    return (
      <Planned
        key={`${job.id} ${strategy ?? ""}`}
        survey={null}
        siteId={job.siteId}
        jobId={job.id}
        strategy={strategy}
        purpose={search.get("purpose") ?? undefined}
        taskIds={search.get("tasks")?.split(",")}
        onDirty={setDirty}
        choices={choices}
      />
    );
  return (
    <PageBody>
      <PageHead
        way={<MeasuringWays />}
        title={i18n.t("New survey")}
        lead={i18n.t("A group is the workers of a job: the job carries the nominal day.")}
      />
      {choices}
      {jobs.error && <Failed error={jobs.error} onRetry={() => void jobs.refetch()} />}
      {jobs.data && <Empty title={i18n.t("Choose the group that is to be measured.")} />}
    </PageBody>
  );
}

function Planned({
  survey,
  siteId,
  jobId,
  strategy,
  purpose,
  taskIds,
  onDirty,
  choices,
}: {
  survey: SurveyDetail | null;
  siteId: string;
  jobId: string;
  strategy?: Strategy;
  purpose?: string;
  taskIds?: readonly string[];
  onDirty?: (isDirty: boolean) => void;
  choices?: React.ReactNode;
}) {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const choice = useSiteChoice();
  const jobs = useQuery(jobQueries.list());
  const plan = useQuery(
    surveyQueries.plan({
      siteId,
      jobId,
      strategy: survey?.strategy ?? strategy,
      ...(survey ? { seed: survey.drawSeed } : {}),
    }),
  );
  const jobName = survey?.jobName ?? jobs.data?.rows.find(({ id }) => id === jobId)?.name ?? "";
  return (
    <>
      <PageBody>
        <PageHead
          way={<MeasuringWays />}
          title={survey ? i18n.t("Change {name}", { name: survey.name }) : i18n.t("New survey")}
          lead={i18n.t("{group}: what the standard asks for is filled in.", { group: jobName })}
        />
        {choices}
        {plan.error && <Failed error={plan.error} onRetry={() => void plan.refetch()} />}
        {plan.data && jobName !== "" && (
          <SurveyForm
            survey={survey}
            plan={plan.data}
            jobName={jobName}
            siteId={siteId}
            jobId={jobId}
            purpose={purpose}
            taskIds={taskIds}
            onDirty={onDirty}
            today={choice.todayAt(siteId)}
            onSaved={({ id }) => void navigate(paths.survey(id))}
            onLeave={() => void navigate(survey ? paths.survey(survey.id) : paths.surveys)}
          />
        )}
      </PageBody>
      <Folio>
        {i18n.t(
          "Clauses are those of ISO 9612:2009, from memory; the revision of 2025 may ask for others.",
        )}
      </Folio>
    </>
  );
}
