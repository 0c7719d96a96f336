import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { useState } from "react";
import { z } from "zod";
import { formatDate } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import type { FileView } from "../../../shared/schemas/outing";
import { TrainingInput, TrainingView } from "../../../shared/schemas/training";
import { FileInput } from "../../components/file-input";
import {
  type Choice,
  DateField,
  DurationField,
  SelectField,
  TextAreaField,
  TextField,
} from "../../components/form";
import { TextButton } from "../../components/link";
import { RecordForm } from "../../components/record-form";
import { useLocale } from "../../lib/i18n";
import { problemText } from "../../lib/problem-text";
import { numbersIn } from "./numbers-in";
import { trainingQueries } from "./queries";

/** As the server has it, with the numbers typed or pasted as one text. */
const TypedTraining = TrainingInput.extend({
  employeeNumbers: z
    .string()
    .trim()
    .min(1)
    .max(40_000)
    .transform(numbersIn)
    .pipe(TrainingInput.shape.employeeNumbers),
});

const toBody = ({ siteId, heldOn, title, durationMin, fileId, attendance }: TrainingView) => ({
  siteId,
  heldOn,
  title,
  durationMin,
  fileId,
  employeeNumbers: attendance.map(({ employeeNumber }) => employeeNumber),
});

/** A training with the list of who was there; a crew's numbers can be put in at once. */
export function TrainingForm({
  training,
  sites,
  today,
  crewsOf,
  numbersOfCrew,
  onDone,
}: {
  /** Without: a new one. */
  training: TrainingView | null;
  /** The first one is where a new training is held unless another is chosen. */
  sites: readonly Choice[];
  today: string;
  crewsOf: (siteId: string) => readonly Choice[];
  numbersOfCrew: (crewId: string) => Promise<readonly string[]>;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const [sent, setSent] = useState<readonly FileView[]>([]);
  const [crewError, setCrewError] = useState<unknown>(null);
  return (
    <RecordForm
      name={training ? i18n.t("Put the training right") : i18n.t("New training")}
      schema={TypedTraining}
      viewSchema={TrainingView}
      path="/trainings"
      record={training}
      toBody={toBody}
      defaultValues={
        training
          ? {
              ...toBody(training),
              employeeNumbers: toBody(training).employeeNumbers.join("\n"),
            }
          : {
              siteId: sites[0]?.value ?? "",
              heldOn: today,
              title: "",
              durationMin: 30,
              fileId: null,
              employeeNumbers: "",
            }
      }
      conflictTitle={i18n.t("Someone saved this training before you")}
      fields={[
        {
          key: "heldOn",
          label: i18n.t("Held on"),
          show: ({ heldOn }) => formatDate(heldOn, locale),
        },
        { key: "title", label: i18n.t("Title"), show: ({ title }) => title },
        {
          key: "durationMin",
          label: i18n.t("Duration"),
          show: ({ durationMin }) => formatDuration(durationMin, locale),
        },
        {
          key: "employeeNumbers",
          label: i18n.t("Who was there"),
          show: ({ employeeNumbers }) => employeeNumbers.join(", "),
        },
      ]}
      onSaved={() => {
        void client.invalidateQueries({ queryKey: trainingQueries.all });
        onDone();
      }}
      onLeave={onDone}
    >
      {(form) => {
        const crews = crewsOf(String(form.watch("siteId")));
        return (
          <>
            {training === null && sites.length > 1 && (
              <SelectField form={form} name="siteId" label={i18n.t("Site")} choices={sites} />
            )}
            <DateField form={form} name="heldOn" label={i18n.t("Held on")} />
            <TextField form={form} name="title" label={i18n.t("Title")} />
            <DurationField
              form={form}
              name="durationMin"
              label={i18n.t("Duration")}
              unit={i18n.t("min")}
            />
            <FileInput
              label={i18n.t("What was shown, PDF or photograph")}
              accept="application/pdf,image/*"
              atMost={1}
              files={sent}
              onFiles={(files) => {
                setSent(files);
                form.setValue("fileId", files[0]?.id ?? training?.fileId ?? null, {
                  shouldDirty: true,
                });
              }}
            />
            <TextAreaField
              form={form}
              name="employeeNumbers"
              rows={6}
              label={i18n.t("Who was there")}
              note={i18n.t(
                "Employee numbers, typed or pasted: one a line, or with commas between them.",
              )}
            />
            {crews.length > 0 && (
              <p className="training-crews">
                {i18n.t("Put in a whole crew:")}{" "}
                {crews.map(({ value, label }) => (
                  <TextButton
                    key={value}
                    onClick={() => {
                      numbersOfCrew(value).then(
                        (numbers) => {
                          setCrewError(null);
                          const typed = numbersIn(String(form.getValues("employeeNumbers") ?? ""));
                          form.setValue(
                            "employeeNumbers",
                            [...new Set([...typed, ...numbers])].join("\n"),
                            { shouldDirty: true },
                          );
                        },
                        (error: unknown) => setCrewError(error),
                      );
                    }}
                  >
                    {label}
                  </TextButton>
                ))}
              </p>
            )}
            {crewError !== null && (
              <p className="field-error" role="alert">
                {problemText(i18n, crewError)}
              </p>
            )}
          </>
        );
      }}
    </RecordForm>
  );
}
