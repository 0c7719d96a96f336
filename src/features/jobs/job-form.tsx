import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { get, type UseFormReturn, useFieldArray } from "react-hook-form";
import type { z } from "zod";
import { formatDuration } from "../../../shared/format/duration";
import { JobInput, JobView } from "../../../shared/schemas/task";
import { Button } from "../../components/button";
import { CheckField, type Choice, Field, SelectField, TextField } from "../../components/form";
import { TextButton } from "../../components/link";
import { NumberInput } from "../../components/number-input";
import { RecordForm } from "../../components/record-form";
import { useLocale } from "../../lib/i18n";
import { jobQueries } from "./queries";

type View = z.infer<typeof JobView>;
type Form = UseFormReturn<z.input<typeof JobInput>, unknown, JobInput>;

export interface CrewLength {
  readonly id: string;
  readonly name: string;
  readonly siteId: string;
  readonly usualLengthMin: number;
}

const toBody = ({ siteId, name, isArchived, tasks }: View): JobInput => ({
  siteId,
  name,
  isArchived,
  tasks,
});

/** Minutes per task, their sum, and how it stands against the length of the site's shifts. */
function NominalDay({
  form,
  tasks,
  crews,
}: {
  form: Form;
  tasks: readonly Choice[];
  crews: readonly CrewLength[];
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { fields, append, remove } = useFieldArray({ control: form.control, name: "tasks" });
  const rows = form.watch("tasks");
  const sumMin = rows.reduce(
    (sum, { durationMin }) => sum + (typeof durationMin === "number" ? durationMin : 0),
    0,
  );
  const free = tasks.filter(({ value }) => !rows.some(({ taskId }) => taskId === value));
  const { errors } = form.formState;
  const whole = get(errors, "tasks.root.message") ?? get(errors, "tasks.message");
  return (
    <Field
      label={i18n.t("Nominal day")}
      isGroup
      error={typeof whole === "string" ? whole : undefined}
    >
      {() => (
        <>
          <ul className="nominal-day">
            {fields.map((row, index) => {
              const name =
                tasks.find(({ value }) => value === rows[index]?.taskId)?.label ?? i18n.t("Task");
              const fault = (get(errors, `tasks.${index}.durationMin.message`) ??
                get(errors, `tasks.${index}.taskId.message`)) as string | undefined;
              return (
                <li key={row.id}>
                  <select
                    className="input"
                    aria-label={i18n.t("Task {number}", { number: index + 1 })}
                    value={rows[index]?.taskId ?? ""}
                    onChange={(event) =>
                      form.setValue(`tasks.${index}.taskId`, event.target.value, {
                        shouldDirty: true,
                      })
                    }
                  >
                    {tasks.map(({ value, label }) => (
                      <option key={value} value={value}>
                        {label}
                      </option>
                    ))}
                  </select>
                  <NumberInput
                    aria-label={i18n.t("Minutes in {task}", { task: name })}
                    aria-invalid={fault ? true : undefined}
                    value={rows[index]?.durationMin}
                    onValue={(value) =>
                      form.setValue(`tasks.${index}.durationMin`, value as number, {
                        shouldDirty: true,
                        shouldValidate: form.formState.isSubmitted,
                      })
                    }
                  />
                  <span className="unit">min</span>
                  <TextButton
                    aria-label={i18n.t("Take {task} out", { task: name })}
                    onClick={() => remove(index)}
                  >
                    {i18n.t("Take out")}
                  </TextButton>
                  {fault && <p className="field-error">{fault}</p>}
                </li>
              );
            })}
          </ul>
          <p className="nominal-sum" role="status">
            <span>{i18n.t("Together")}</span>
            <span className="mono">{formatDuration(sumMin, locale)}</span>
          </p>
          {crews.map(({ id, name, usualLengthMin }) => {
            const overMin = sumMin - usualLengthMin;
            const length = formatDuration(usualLengthMin, locale);
            return (
              <p key={id} className="nominal-against">
                {overMin === 0
                  ? i18n.t("{crew}, {length}: fits.", { crew: name, length })
                  : overMin > 0
                    ? i18n.t("{crew}, {length}: {over} too long.", {
                        crew: name,
                        length,
                        over: formatDuration(overMin, locale),
                      })
                    : i18n.t("{crew}, {length}: {under} not accounted for.", {
                        crew: name,
                        length,
                        under: formatDuration(-overMin, locale),
                      })}
              </p>
            );
          })}
          {free.length > 0 && (
            <p className="mt-3">
              <Button
                onClick={() =>
                  append({ taskId: free[0]?.value ?? "", durationMin: null as unknown as number })
                }
              >
                {i18n.t("Add a task")}
              </Button>
            </p>
          )}
        </>
      )}
    </Field>
  );
}

/** A job with its nominal day. Days open filled with it; days that are saved stay as they are. */
export function JobForm({
  job,
  siteId,
  sites,
  tasksOf,
  crews,
  onDone,
}: {
  job: View | null;
  siteId: string;
  sites: readonly Choice[];
  tasksOf: (siteId: string) => readonly Choice[];
  crews: readonly CrewLength[];
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const dayWords = (body: JobInput) =>
    body.tasks
      .map(
        ({ taskId, durationMin }) =>
          `${tasksOf(body.siteId).find(({ value }) => value === taskId)?.label ?? i18n.t("Task")} ${formatDuration(durationMin, locale)}`,
      )
      .join(", ") || i18n.t("none");
  return (
    <RecordForm
      name={job ? i18n.t("Change {name}", { name: job.name }) : i18n.t("New job")}
      schema={JobInput}
      viewSchema={JobView}
      path="/jobs"
      record={job}
      defaultValues={job ? toBody(job) : { siteId, name: "", isArchived: false, tasks: [] }}
      toBody={toBody}
      fields={[
        { key: "name", label: i18n.t("Name"), show: ({ name }) => name },
        { key: "tasks", label: i18n.t("Nominal day"), show: dayWords },
        {
          key: "isArchived",
          label: i18n.t("In use"),
          show: ({ isArchived }) => (isArchived ? i18n.t("no longer") : i18n.t("yes")),
        },
      ]}
      conflictTitle={i18n.t("Someone saved this job before you")}
      onSaved={() => {
        void client.invalidateQueries({ queryKey: jobQueries.all });
        onDone();
      }}
      onLeave={onDone}
    >
      {(form) => {
        const site = form.watch("siteId");
        return (
          <>
            {!job && sites.length > 1 && (
              <SelectField form={form} name="siteId" label={i18n.t("Site")} choices={sites} />
            )}
            <TextField form={form} name="name" label={i18n.t("Name")} />
            <NominalDay
              form={form}
              tasks={tasksOf(site)}
              crews={crews.filter((crew) => crew.siteId === site)}
            />
            {job && (
              <CheckField
                form={form}
                name="isArchived"
                label={i18n.t("In use")}
                text={i18n.t("No longer offered for workers")}
              />
            )}
          </>
        );
      }}
    </RecordForm>
  );
}
