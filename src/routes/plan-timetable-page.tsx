import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useNavigate, useParams } from "react-router-dom";
import { countVerdicts } from "../../shared/planning/try-changes";
import { ruleSetVersion } from "../../shared/rule-sets";
import { TimetableKeep, type TimetableView } from "../../shared/schemas/timetable";
import { Button, ButtonLink } from "../components/button";
import { Failed } from "../components/failed";
import {
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  TextField,
  useSchemaForm,
} from "../components/form";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { Status } from "../components/status";
import { CountsLine } from "../features/planning/counts-line";
import { OutcomeTable } from "../features/planning/outcome-table";
import {
  timetableQueries,
  useCancelTimetable,
  useKeepTimetable,
} from "../features/planning/timetable-queries";
import { TimetableSheet, TimetableTable } from "../features/planning/timetable-table";
import { demandSentence, goodnessSentence } from "../features/planning/timetable-words";
import { useChangeKey } from "../lib/change-key";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/planning.css";

/** A timetable that was asked for: how far the search is, then the timetable, or what contradicts what. */
export function Component() {
  const { id = "" } = useParams();
  const { data, error, refetch } = useQuery(timetableQueries.one(id));
  if (error && !data)
    return (
      <PageBody>
        <Failed error={error} onRetry={() => void refetch()} />
      </PageBody>
    );
  if (!data)
    return (
      <PageBody>
        <span className="loading-line" />
      </PageBody>
    );
  return <Timetable key={data.id} view={data} />;
}

function Timetable({ view }: { view: TimetableView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { scope, request, basis, answer } = view;
  const ruleSet = ruleSetVersion(view.ruleSetKey, view.ruleSetVersion);
  const goal = ruleSet?.criteria.find(({ id }) => id === request.goal)?.label ?? request.goal;
  return (
    <>
      <PageBody>
        <PageHead
          way={<TextLink to={paths.plans}>{i18n.t("Plans")}</TextLink>}
          title={i18n.t("Timetable: {name}", { name: scope.name })}
          lead={
            answer?.kind === "timetable"
              ? goodnessSentence(i18n, locale, answer)
              : i18n.t("{site}. Limit: {goal}.", { site: scope.siteName, goal: i18n._(goal) })
          }
          actions={
            view.can.keep && (
              <ButtonLink to={paths.newTimetableFor(scope.scopeKind, scope.scopeId)}>
                {i18n.t("Ask for another")}
              </ButtonLink>
            )
          }
        />
        <Status>{answer?.kind === "timetable" && i18n.t("A timetable was found.")}</Status>
        {view.state === "working" && <Working view={view} />}
        {view.state === "cancelled" && <p>{i18n.t("The search was given up.")}</p>}
        {view.state === "failed" && (
          <p>{i18n.t("The search broke off several times. Ask for the timetable again.")}</p>
        )}
        {answer?.kind === "undecided" && (
          <p>
            {i18n.t(
              "In the time there was, neither a timetable nor a contradiction was found. Ask for less: fewer people, longer stays, or fewer times.",
            )}
          </p>
        )}
        {answer?.kind === "contradiction" && (
          <Section title={i18n.t("This can’t all be kept to")} id="contradiction">
            <ul className="change-list is-plain">
              {answer.demands.map((demand) => (
                <li key={JSON.stringify(demand)}>
                  {demandSentence(i18n, locale, demand, { request, basis })}
                </li>
              ))}
            </ul>
            <p className="beneath">
              {answer.isSmallest
                ? i18n.t(
                    "These contradict one another, whatever else is asked. With any one of them left out, the others can be kept to together.",
                  )
                : i18n.t(
                    "These contradict one another; in the time there was it is not proved that all of them are needed for it.",
                  )}
            </p>
          </Section>
        )}
        {answer?.kind === "timetable" && (
          <>
            <Section title={i18n.t("Who is where when")} id="timetable">
              <TimetableTable request={request} basis={basis} found={answer} />
              <TimetableSheet request={request} basis={basis} found={answer} />
            </Section>
            <Section title={i18n.t("What the record’s arithmetic says of these days")} id="outcome">
              <CountsLine
                before={countVerdicts(answer.outcome.workers.map(({ before }) => before))}
                after={countVerdicts(answer.outcome.workers.map(({ after }) => after))}
              />
              {answer.outcome.workers.some(({ after }) => after.verdict === "cant-tell-yet") && (
                <p>
                  {i18n.t(
                    "Where it can’t be told yet, the uncertainty of the levels reaches across the limit: ask that nobody goes beyond a smaller share of it.",
                  )}
                </p>
              )}
              <OutcomeTable rows={answer.outcome.workers} showsSince={false} />
            </Section>
            {view.planId !== null ? (
              <p>
                <TextLink to={paths.plan(view.planId)}>{i18n.t("It is kept as a Plan.")}</TextLink>
              </p>
            ) : (
              view.can.keep && (
                <Section title={i18n.t("Keep it as a Plan")} id="keep">
                  <KeepForm view={view} />
                </Section>
              )
            )}
          </>
        )}
      </PageBody>
      <Folio>
        {ruleSet &&
          i18n.t("{title}, rule set version {version}; method version {method}.", {
            title: i18n._(ruleSet.title),
            version: ruleSet.version,
            method: view.methodVersion,
          })}
      </Folio>
    </>
  );
}

function Working({ view }: { view: TimetableView }) {
  const { i18n } = useLingui();
  const cancel = useCancelTimetable(view.id);
  const changeKey = useChangeKey();
  return (
    <div className="change-actions">
      <progress max={100} value={view.progressPct} aria-label={i18n.t("How far the search is")} />
      <span>{i18n.t("A timetable is being searched for.")}</span>
      {view.can.keep && (
        <Button
          isBusy={cancel.isPending}
          onClick={() => {
            if (!cancel.isPending) cancel.mutate(changeKey.keyFor(view.id));
          }}
        >
          {i18n.t("Stop")}
        </Button>
      )}
      <FormProblem error={cancel.error} />
    </div>
  );
}

function KeepForm({ view }: { view: TimetableView }) {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const keep = useKeepTimetable(view.id);
  const changeKey = useChangeKey();
  const form = useSchemaForm(TimetableKeep, { keepAs: view.id, defaultValues: { name: "" } });
  return (
    <Form
      aria-label={i18n.t("Keep it as a Plan")}
      onSubmit={form.handleSubmit(({ name }) => {
        if (keep.isPending) return;
        const { revision } = view;
        keep.mutate(
          { name, revision, key: changeKey.keyFor({ name, revision }) },
          {
            onSuccess: ({ id }) => {
              changeKey.forget();
              void navigate(paths.plan(id));
            },
            onError: showIssuesOn(form, i18n),
          },
        );
      })}
    >
      <TextField
        form={form}
        name="name"
        label={i18n.t("Name")}
        note={i18n.t("It is kept as it stands, with what it rests on.")}
      />
      <FormProblem error={keep.error} />
      <FormActions>
        <SubmitButton isBusy={keep.isPending}>{i18n.t("Keep the Plan")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
