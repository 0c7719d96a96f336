import { useLingui } from "@lingui/react";
import { type LetterView, PaperAcknowledgement } from "../../../shared/schemas/letter";
import {
  DateField,
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useChangeKey } from "../../lib/change-key";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { useAcknowledgeOnPaper } from "./queries";

/** The signed letter came back: the date beside the signature. */
export function PaperForm({
  letter,
  today,
  onSaved,
}: {
  letter: LetterView;
  today: string;
  onSaved: () => void;
}) {
  const { i18n } = useLingui();
  const acknowledge = useAcknowledgeOnPaper(letter.id, onSaved);
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const form = useSchemaForm(PaperAcknowledgement, {
    keepAs: "paper",
    mode: "onSubmit",
    defaultValues: { signedOn: today },
  });
  return (
    <Form
      className="inset-form"
      aria-label={i18n.t("Signed on paper")}
      onSubmit={form.handleSubmit((body) => {
        if (!begin()) return;
        acknowledge.mutate(
          { body, key: changeKey.keyFor(body) },
          { onSuccess: changeKey.forget, onError: showIssuesOn(form, i18n), onSettled: end },
        );
      })}
    >
      <DateField form={form} name="signedOn" label={i18n.t("Signed on")} />
      <FormProblem error={acknowledge.error} />
      <FormActions>
        <SubmitButton isBusy={acknowledge.isPending}>{i18n.t("Record it")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
