import { useLingui } from "@lingui/react";
import { recordingText } from "../../../shared/recordings/recording-text";
import {
  isAcceptable,
  RecordingFaults,
  type RecordingView,
} from "../../../shared/schemas/recording";
import {
  Form,
  FormActions,
  SubmitButton,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useAcceptFaults } from "./queries";
import { showRecordingIssuesOn } from "./recording-issues";

/** What a recording's fault is, and the reason for which it is used all the same. */
export function FaultQuestion({ view }: { view: RecordingView }) {
  const { i18n } = useLingui();
  const accept = useAcceptFaults(view.id);
  const code = view.failure?.code ?? "";
  const form = useSchemaForm(RecordingFaults, {
    mode: "onSubmit",
    defaultValues: { accept: isAcceptable(code) ? [code] : [], reason: "" },
  });
  return (
    <section className="recording-question" aria-label={i18n.t("Needs your word")}>
      <p>
        <b>{view.failure && recordingText(i18n, code, view.failure.params)}</b>
      </p>
      {view.can.change && (
        <Form
          labels="above"
          aria-label={i18n.t("Use it all the same")}
          onSubmit={form.handleSubmit((body) =>
            accept.mutate(body, { onError: showRecordingIssuesOn(form, i18n) }),
          )}
        >
          <TextAreaField
            form={form}
            name="reason"
            label={i18n.t("Use it all the same, because…")}
            rows={2}
            note={i18n.t("The reason shows wherever its figures go.")}
          />
          <FormProblem error={accept.error} />
          <FormActions>
            <SubmitButton isBusy={accept.isPending}>{i18n.t("Analyse it with this")}</SubmitButton>
          </FormActions>
        </Form>
      )}
    </section>
  );
}
