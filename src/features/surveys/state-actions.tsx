import { useLingui } from "@lingui/react";
import { useMutation, useQueryClient } from "@tanstack/react-query";
import { useState } from "react";
import type { z } from "zod";
import { SurveyDetail, SurveyStateChange } from "../../../shared/schemas/survey";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
import { Form, showIssuesOn, TextAreaField, useSchemaForm } from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { api } from "../../lib/api";
import { surveyQueries } from "./queries";

type State = SurveyDetail["state"];
type Change = z.output<typeof SurveyStateChange>;

function useStateChange(survey: SurveyDetail, onError?: (error: unknown) => void) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (body: Change) =>
      api.post(`/surveys/${survey.id}/state`, {
        body,
        ifMatch: String(survey.revision),
        schema: SurveyDetail,
      }),
    onSuccess: (view) => client.setQueryData(surveyQueries.one(view.id).queryKey, view),
    onError,
    onSettled: () => {
      void client.invalidateQueries({ queryKey: surveyQueries.all });
      void client.invalidateQueries({ queryKey: ["measuring-needs"] });
    },
  });
}

/** What a survey can become from where it is, the usual next first. */
export function StateActions({ survey }: { survey: SurveyDetail }) {
  const { i18n } = useLingui();
  const [isStriking, setIsStriking] = useState(false);
  const change = useStateChange(survey);
  const { state } = survey;
  const next: Partial<Record<State, { to: State; label: string }>> = {
    planned: { to: "measuring", label: i18n.t("Begin measuring") },
    measuring: { to: "done", label: i18n.t("Measuring is done") },
    done: { to: "measuring", label: i18n.t("Measure more") },
  };
  const step = next[state];
  return (
    <>
      {step && (
        <Button
          kind={state === "planned" ? "primary" : "plain"}
          isBusy={change.isPending}
          onClick={() => change.mutate({ state: step.to, note: null })}
        >
          {step.label}
        </Button>
      )}
      {state !== "struck" && (
        <Button onClick={() => setIsStriking(true)}>{i18n.t("Strike")}</Button>
      )}
      <FormProblem error={change.error} />
      {isStriking && <StrikeSurvey survey={survey} onDone={() => setIsStriking(false)} />}
    </>
  );
}

function StrikeSurvey({ survey, onDone }: { survey: SurveyDetail; onDone: () => void }) {
  const { i18n } = useLingui();
  const form = useSchemaForm(SurveyStateChange, {
    defaultValues: { state: "struck", note: null },
  });
  const strike = useStateChange(survey, showIssuesOn(form, i18n));
  const submit = form.handleSubmit((body) => strike.mutate(body, { onSuccess: onDone }));
  return (
    <Dialog
      isOpen
      onClose={onDone}
      title={i18n.t("Strike this survey")}
      lead={i18n.t("Its runs stay what they are. Its instruments are free again.")}
      actions={
        <>
          <Button kind="primary" isBusy={strike.isPending} onClick={() => void submit()}>
            {i18n.t("Strike it")}
          </Button>
          <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
        </>
      }
    >
      <Form labels="above" aria-label={i18n.t("Strike this survey")} onSubmit={submit}>
        <TextAreaField form={form} name="note" label={i18n.t("Reason")} rows={2} />
        <FormProblem error={strike.error} />
      </Form>
    </Dialog>
  );
}
