import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useParams, useSearchParams } from "react-router-dom";
import { formatDate, formatInstant, formatShortDate } from "../../shared/format/date";
import { formatLevel } from "../../shared/format/level";
import { RISK_FACTORS, type SurveyDetail } from "../../shared/schemas/survey";
import { riskFactorTitle, stateTitle, strategyTitle } from "../../shared/surveys/words";
import { Button, ButtonLink } from "../components/button";
import { RecomputeProgress } from "../components/change-preview";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, Leaders, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { AdoptionForm } from "../features/surveys/adoption-form";
import { surveyQueries } from "../features/surveys/queries";
import { StateActions } from "../features/surveys/state-actions";
import { ResultsTable, SamplesTable } from "../features/surveys/survey-tables";
import { apiAddress } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { MeasuringWays } from "./measuring-frame";
import { useSiteChoice } from "./site-choice";
import "../styles/register.css";
import "../styles/surveys.css";

/** A survey: what is wanted against what is there, what it comes to, and its adoption. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id = "" } = useParams();
  const [search, setSearch] = useSearchParams();
  const [isAdopted, setIsAdopted] = useState(false);
  const choice = useSiteChoice();
  const { data: survey, error, refetch } = useQuery(surveyQueries.one(id));
  if (!survey)
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
  const { can, state, results } = survey;
  const isOpen = state === "planned" || state === "measuring";
  const hasResult = results.some(({ levelDb }) => levelDb !== null);
  const canAdopt = can.adopt && hasResult && (state === "measuring" || state === "done");
  const isAdopting = canAdopt && search.has("adopt");
  const missing = results.reduce((sum, { missingCount }) => sum + missingCount, 0);
  return (
    <>
      <PageBody margin={<SurveyFacts survey={survey} siteName={choice.siteName(survey.siteId)} />}>
        <PageHead
          way={<MeasuringWays />}
          title={survey.name}
          lead={i18n.t(
            "{state}. {strategy}, {group}. {missing, plural, =0 {All samples that the standard asks for are there.} one {# sample is missing.} other {# samples are missing.}}",
            {
              state: stateTitle(i18n, state),
              strategy: strategyTitle(i18n, survey.strategy),
              group: survey.jobName,
              missing,
            },
          )}
          actions={
            <>
              {canAdopt && !isAdopting && (
                <Button kind="primary" onClick={() => setSearch({ adopt: "" })}>
                  {i18n.t("Adopt the results")}
                </Button>
              )}
              {can.change && <StateActions survey={survey} />}
              {can.change && isOpen && (
                <ButtonLink to={paths.changeSurvey(id)}>{i18n.t("Change the plan")}</ButtonLink>
              )}
              <a className="link" href={apiAddress(`/surveys/${id}/field-sheet.pdf`)} download>
                {i18n.t("Field sheet (PDF)")}
              </a>
              <a className="link" href={apiAddress(`/surveys/${id}/report.pdf`)} download>
                {i18n.t("Survey report (PDF)")}
              </a>
            </>
          }
        />
        {isAdopted && <RecomputeProgress />}
        {state === "struck" && survey.closingNote && (
          <p className="survey-note">
            <span className="reversed">{i18n.t("Struck")}</span>
            {survey.closingNote}
          </p>
        )}
        {isAdopting && (
          <Section title={i18n.t("Adopt the results")} id="adoption">
            <AdoptionForm
              survey={survey}
              today={choice.todayAt(survey.siteId)}
              onSaved={() => {
                setIsAdopted(true);
                setSearch({});
              }}
              onLeave={() => setSearch({})}
            />
          </Section>
        )}
        <Section title={i18n.t("What it comes to")} id="results">
          <ResultsTable survey={survey} />
        </Section>
        {survey.adopted.length > 0 && (
          <Section title={i18n.t("Levels that rest on it")} id="adopted">
            <ul className="need-reasons">
              {survey.adopted.map(({ taskId, taskName, levelDb, effectiveFrom, isInForce }) => (
                <li key={`${taskId} ${effectiveFrom} ${levelDb}`}>
                  <TextLink to={paths.task(taskId)}>{taskName}</TextLink>{" "}
                  {i18n.t("{level} dB(A) from {date} on", {
                    level: formatLevel(levelDb, locale),
                    date: formatDate(effectiveFrom, locale),
                  })}
                  {isInForce && <b>, {i18n.t("in force")}</b>}
                </li>
              ))}
            </ul>
          </Section>
        )}
        <Section title={i18n.t("Samples")} id="samples">
          <SamplesTable survey={survey} />
          {can.change && state === "measuring" && (
            <p className="table-foot">
              <TextLink to={`${paths.outAndBack}?site=${survey.siteId}&survey=${id}`}>
                {i18n.t("Send instruments out")}
              </TextLink>
            </p>
          )}
        </Section>
        <Section title={i18n.t("Beside the level")} id="risks">
          <dl className="facts">
            {RISK_FACTORS.map((factor) => {
              const { answer, note } = survey.riskFactors[factor];
              return (
                <div key={factor}>
                  <dt>{riskFactorTitle(i18n, factor)}</dt>
                  <dd>
                    {answer === null ? (
                      <span className="not-assessed">{i18n.t("not asked yet")}</span>
                    ) : (
                      <b>{answer === "yes" ? i18n.t("yes") : i18n.t("no")}</b>
                    )}{" "}
                    <span className="beneath">{note}</span>
                  </dd>
                </div>
              );
            })}
          </dl>
        </Section>
      </PageBody>
      <Folio>
        {i18n.t(
          "ISO 9612:2009, {strategy}. A sample under the standard’s name passed its field checks with an instrument in calibration.",
          {
            strategy: strategyTitle(i18n, survey.strategy),
          },
        )}
      </Folio>
    </>
  );
}

function SurveyFacts({ survey, siteName }: { survey: SurveyDetail; siteName: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const choice = useSiteChoice();
  const zone = choice.sites.find(({ id }) => id === survey.siteId)?.timeZone ?? "UTC";
  const inPart = (part: SurveyDetail["people"][number]["part"]) =>
    survey.people.filter((person) => person.part === part);
  const names = (part: SurveyDetail["people"][number]["part"]) =>
    inPart(part)
      .map(({ workerId }) => survey.peopleNames[workerId]?.name ?? i18n.t("a worker"))
      .join(", ");
  return (
    <>
      <MarginNote title={i18n.t("Plan")} isRuled>
        <Leaders
          items={[
            { key: "from", label: i18n.t("From"), value: formatShortDate(survey.fromDate, locale) },
            { key: "to", label: i18n.t("To"), value: formatShortDate(survey.toDate, locale) },
          ]}
        />
        <p>
          <TextLink to={paths.group(survey.jobId)}>{survey.jobName}</TextLink>, {siteName}
        </p>
        {survey.purpose && <p>{survey.purpose}</p>}
      </MarginNote>
      <MarginNote title={i18n.t("Whom to measure")}>
        {inPart("drawn").length > 0 && <p>{names("drawn")}</p>}
        {inPart("named").length > 0 && <p>{i18n.t("Named: {names}", { names: names("named") })}</p>}
        {inPart("reserve").length > 0 && (
          <p>{i18n.t("In reserve: {names}", { names: names("reserve") })}</p>
        )}
        {survey.people.length === 0 && <p className="not-assessed">{i18n.t("nobody drawn")}</p>}
        <p>{i18n.t("Drawn with the seed {seed}.", { seed: survey.drawSeed })}</p>
      </MarginNote>
      <MarginNote title={i18n.t("Instruments")}>
        {survey.reservations.length === 0 && (
          <p className="not-assessed">{i18n.t("none reserved")}</p>
        )}
        {survey.reservations.map(({ instrumentId, fromDate, toDate }) => {
          const instrument = survey.instrumentNames[instrumentId];
          const endsBefore =
            instrument?.calibrationDueOn != null && instrument.calibrationDueOn < toDate;
          return (
            <p key={`${instrumentId} ${fromDate}`}>
              <TextLink to={paths.instrument(instrumentId)}>
                {instrument ? `${instrument.name}, ${instrument.serialNumber}` : instrumentId}
              </TextLink>
              , {formatShortDate(fromDate, locale)}
              {toDate !== fromDate && ` – ${formatShortDate(toDate, locale)}`}
              {endsBefore && (
                <b className="block">
                  {i18n.t("its certificate ends on {date}, before then", {
                    date: formatShortDate(instrument.calibrationDueOn ?? "", locale),
                  })}
                </b>
              )}
            </p>
          );
        })}
      </MarginNote>
      <MarginNote title={i18n.t("Who observes")}>
        <p>{survey.observers.join(", ") || i18n.t("nobody named")}</p>
        <p>
          {i18n.t("Planned by {name}, {time}", {
            name: survey.authorName ?? "–",
            time: formatInstant(survey.createdAt, zone, locale),
          })}
        </p>
      </MarginNote>
    </>
  );
}
