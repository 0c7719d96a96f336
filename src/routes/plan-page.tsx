import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useParams } from "react-router-dom";
import { z } from "zod";
import { formatInstant, formatShortDate } from "../../shared/format/date";
import { isolate } from "../../shared/i18n/isolate";
import { ruleSetVersion } from "../../shared/rule-sets";
import type { PlanView } from "../../shared/schemas/plan";
import { localDate } from "../../shared/time/zone";
import { Button } from "../components/button";
import { Failed } from "../components/failed";
import { Form, FormActions, SubmitButton, TextAreaField, useSchemaForm } from "../components/form";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { controlWord } from "../features/findings/control-words";
import { changeSentence } from "../features/planning/change-words";
import { CountsLine } from "../features/planning/counts-line";
import { OutcomeTable } from "../features/planning/outcome-table";
import { PlanSteps } from "../features/planning/plan-steps";
import { planQueries, usePutAside } from "../features/planning/queries";
import { TimetableSheet, TimetableTable } from "../features/planning/timetable-table";
import { goodnessSentence } from "../features/planning/timetable-words";
import { useChangeKey } from "../lib/change-key";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";
import "../styles/planning.css";

/** A kept plan: its changes, what they were expected to do for each worker, and what has been found since. */
export function Component() {
  const { id = "" } = useParams();
  const { data, error, refetch } = useQuery(planQueries.one(id));
  if (error)
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
  return <Plan key={data.id} plan={data} />;
}

function Plan({ plan }: { plan: PlanView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const choice = useSiteChoice();
  const timeZone = choice.sites.find(({ id }) => id === plan.scope.siteId)?.timeZone ?? "UTC";
  const ruleSet = ruleSetVersion(plan.ruleSetKey, plan.ruleSetVersion);
  const goal = ruleSet?.criteria.find(({ id }) => id === plan.goal)?.label ?? plan.goal;
  const nameOf = (id: string) => plan.names[id] ?? i18n.t("(no longer there)");
  const since = new Map(plan.since.map((one) => [one.workerId, one]));
  return (
    <>
      <PageBody>
        <PageHead
          way={<TextLink to={paths.plans}>{i18n.t("Plans")}</TextLink>}
          title={plan.name}
          lead={i18n.t("For {scope}, {site}. Kept {time} by {author}. Everybody Under: {goal}.", {
            scope: isolate(plan.scope.name),
            site: plan.scope.siteName,
            time: formatInstant(plan.keptAt, timeZone, locale),
            author: isolate(plan.authorName ?? i18n.t("nobody known")),
            goal: i18n._(goal),
          })}
          actions={
            plan.timetable && <Button onClick={() => window.print()}>{i18n.t("Print")}</Button>
          }
        />
        {plan.putAsideReason !== null && (
          <p>
            <b>{i18n.t("Put aside.")}</b> {plan.putAsideReason}
          </p>
        )}
        {plan.timetable ? (
          <Section title={i18n.t("Who is where when")} id="timetable">
            <p>{goodnessSentence(i18n, locale, plan.timetable.found)}</p>
            <TimetableTable {...plan.timetable} />
            <TimetableSheet {...plan.timetable} />
            <p className="no-print">
              <a className="link" href={`/api/plans/${plan.id}/timetable.csv`} download>
                {i18n.t("As a file (CSV)")}
              </a>
            </p>
          </Section>
        ) : (
          <Section title={i18n.t("Changes")} id="changes">
            <ol className="change-list">
              {plan.changes.map((change, place) => (
                // biome-ignore lint/suspicious/noArrayIndexKey: a change has no name but its place
                <li key={place}>{changeSentence(i18n, locale, change, nameOf)}</li>
              ))}
            </ol>
          </Section>
        )}
        <Section title={i18n.t("Steps")} id="steps">
          <PlanSteps
            plan={plan}
            today={localDate(new Date(), timeZone)}
            controlWord={(control) => controlWord(i18n, control)}
          />
        </Section>
        <Section title={i18n.t("Expected, and found since")} id="outcome">
          <CountsLine before={plan.before} after={plan.after} />
          <OutcomeTable
            rows={plan.outcome.workers.map((worker) => ({
              ...worker,
              since: since.get(worker.workerId) ?? null,
            }))}
            showsSince
          />
          <p className="beneath">
            {i18n.t(
              "As it is: the nominal day of {date}. Found since: each worker’s latest judged day after it, at the ear, by the same rule set.",
              { date: formatShortDate(plan.baseDate, locale) },
            )}
          </p>
        </Section>
        {plan.can.putAside && plan.putAsideReason === null && (
          <div className="no-print">
            <Section title={i18n.t("Put it aside")} id="put-aside">
              <PutAsideForm plan={plan} />
            </Section>
          </div>
        )}
      </PageBody>
      <Folio>
        {ruleSet &&
          i18n.t("{title}, rule set version {version}; method version {method}.", {
            title: i18n._(ruleSet.title),
            version: ruleSet.version,
            method: plan.methodVersion,
          })}
      </Folio>
    </>
  );
}

const Fields = z.object({ reason: z.string().trim().min(3).max(2000) });

function PutAsideForm({ plan }: { plan: PlanView }) {
  const { i18n } = useLingui();
  const putAside = usePutAside(plan.id);
  const changeKey = useChangeKey();
  const form = useSchemaForm(Fields, { keepAs: plan.id, defaultValues: { reason: "" } });
  return (
    <Form
      aria-label={i18n.t("Put it aside")}
      onSubmit={form.handleSubmit(({ reason }) => {
        if (putAside.isPending) return;
        const { revision } = plan;
        putAside.mutate(
          { reason, revision, key: changeKey.keyFor({ reason, revision }) },
          { onSuccess: () => changeKey.forget() },
        );
      })}
    >
      <TextAreaField
        form={form}
        name="reason"
        label={i18n.t("Why")}
        note={i18n.t("It stays readable, and is followed no more.")}
      />
      <FormProblem error={putAside.error} />
      <FormActions>
        <SubmitButton isBusy={putAside.isPending}>{i18n.t("Put aside")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
