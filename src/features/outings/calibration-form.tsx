import { useLingui } from "@lingui/react";
import { useState } from "react";
import { z } from "zod";
import { CalibrationInput, type FileView } from "../../../shared/schemas/outing";
import { Button } from "../../components/button";
import { FileInput } from "../../components/file-input";
import {
  DateField,
  Form,
  FormActions,
  NumberField,
  RadioGroup,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useChangeKey } from "../../lib/change-key";
import { useRecordCalibration } from "./queries";

/** The outcome is a choice of two words and no box that is forgotten. */
const Fields = z
  .object({
    doneOn: z.string().nullable(),
    outcome: z.enum(["passed", "failed"]),
    foundErrorDb: z.number().nullable(),
    dueOn: z.string().nullable(),
    note: z.string(),
  })
  .check((context) => {
    const parsed = CalibrationInput.safeParse(toBody(context.value, null));
    for (const issue of parsed.error?.issues ?? [])
      context.issues.push({ ...issue, input: context.value } as never);
  });
type Values = z.infer<typeof Fields>;

const toBody = (values: Values, certificate: FileView | null): CalibrationInput => ({
  doneOn: values.doneOn as string,
  hasPassed: values.outcome === "passed",
  foundErrorDb: values.foundErrorDb,
  dueOn: values.outcome === "passed" ? values.dueOn : null,
  certificateFileId: certificate?.id ?? null,
  note: values.note,
});

export function CalibrationForm({
  instrumentId,
  onDone,
}: {
  instrumentId: string;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const record = useRecordCalibration(instrumentId);
  const changeKey = useChangeKey();
  const [files, setFiles] = useState<readonly FileView[]>([]);
  const form = useSchemaForm(Fields, {
    defaultValues: {
      doneOn: null,
      outcome: "passed",
      foundErrorDb: null,
      dueOn: null,
      note: "",
    },
  });
  const hasPassed = form.watch("outcome") === "passed";
  return (
    <Form
      aria-label={i18n.t("Record a calibration")}
      onSubmit={form.handleSubmit((values) => {
        const body = toBody(values, files[0] ?? null);
        record.mutate(
          { body, key: changeKey.keyFor(body) },
          { onSuccess: onDone, onError: showIssuesOn(form, i18n) },
        );
      })}
    >
      <DateField form={form} name="doneOn" label={i18n.t("Done on")} />
      <RadioGroup
        form={form}
        name="outcome"
        label={i18n.t("Outcome")}
        choices={[
          { value: "passed", label: i18n.t("passed") },
          {
            value: "failed",
            label: i18n.t("failed"),
            note: i18n.t("What was measured since its last good check is then in doubt."),
          },
        ]}
      />
      {hasPassed && (
        <DateField
          form={form}
          name="dueOn"
          label={i18n.t("Good until")}
          isOptional
          note={i18n.t("As the certificate says.")}
        />
      )}
      <NumberField
        form={form}
        name="foundErrorDb"
        label={i18n.t("Error found")}
        unit="dB"
        isOptional
        note={i18n.t("Before it was adjusted.")}
      />
      <FileInput
        label={i18n.t("Certificate")}
        accept="application/pdf,image/*"
        atMost={1}
        files={files}
        onFiles={setFiles}
      />
      <TextAreaField form={form} name="note" label={i18n.t("Note")} rows={2} isOptional />
      <FormProblem error={record.error} />
      <FormActions>
        <SubmitButton isBusy={record.isPending}>{i18n.t("Save the calibration")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}
