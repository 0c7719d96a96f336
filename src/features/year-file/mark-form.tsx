import { useLingui } from "@lingui/react";
import { type DrawnRecord, type DrawView, MarkInput } from "../../../shared/schemas/draw";
import {
  Form,
  FormActions,
  RadioGroup,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useMarkDrawn } from "./draw-queries";
import { markWord } from "./draw-words";

/** In order, or a question with what is asked. */
export function MarkForm({
  draw,
  record: { position, mark },
  onDone,
}: {
  draw: DrawView;
  record: DrawnRecord;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const marking = useMarkDrawn(draw.id);
  const form = useSchemaForm(MarkInput, {
    defaultValues: { position, word: mark?.word, note: mark?.note ?? "" },
    keepAs: `mark ${draw.id} ${position}`,
  });
  return (
    <Form
      aria-label={i18n.t("Mark record {number}", { number: position })}
      onSubmit={form.handleSubmit((body) => {
        if (marking.begin())
          marking.mutate(body, { onSuccess: onDone, onError: showIssuesOn(form, i18n) });
      })}
    >
      <RadioGroup
        form={form}
        name="word"
        label={i18n.t("Mark")}
        choices={MarkInput.shape.word.options.map((value) => ({
          value,
          label: markWord(i18n, value),
        }))}
      />
      <TextAreaField
        form={form}
        name="note"
        rows={2}
        label={i18n.t("Note")}
        note={i18n.t("A question says what is asked.")}
      />
      <FormProblem error={marking.error} />
      <FormActions>
        <SubmitButton isBusy={marking.isPending}>{i18n.t("Keep the mark")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
