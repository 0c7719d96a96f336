import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useFieldArray } from "react-hook-form";
import type { z } from "zod";
import { formatInstant } from "../../../shared/format/date";
import { formatShare } from "../../../shared/format/dose";
import { formatDuration } from "../../../shared/format/duration";
import { formatLimit } from "../../../shared/format/level";
import { ShiftCorrection, ShiftView } from "../../../shared/schemas/shift";
import { Button } from "../../components/button";
import { ConflictDialog, type ConflictField } from "../../components/conflict-dialog";
import {
  CheckField,
  DurationField,
  Form,
  FormActions,
  NumberField,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  TimeField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { isEndAhead } from "../../lib/end-ahead";
import { useLocale } from "../../lib/i18n";
import { references } from "../../lib/references";
import { useRevisedSave } from "../../lib/revised-save";
import { type Shift, useShiftSaved } from "./shift-queries";

type Correction = z.output<typeof ShiftCorrection>;

const bodyOf = ({
  localStart,
  whichHour,
  lengthMin,
  unaccounted,
  tasks,
  note,
}: Shift): Correction => ({
  localStart,
  whichHour,
  lengthMin,
  unaccounted,
  tasks,
  note,
  reason: "",
  confirmsWholeDay: false,
  confirmsOpenEnd: false,
});

export function unaccountedWords(
  i18n: ReturnType<typeof useLingui>["i18n"],
  locale: ReturnType<typeof useLocale>,
  unaccounted: Shift["unaccounted"],
): string {
  switch (unaccounted.how) {
    case "unknown":
      return i18n.t("not known");
    case "like-the-rest":
      return i18n.t("like the rest");
    case "quiet":
      return i18n.t("quiet, {level} dB", { level: formatLimit(unaccounted.levelDb, locale) });
  }
}

/** The next revision of a shift, with its reason. */
export function CorrectShift({
  shift,
  siteId,
  onDone,
}: {
  shift: Shift;
  siteId: string;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const saved = useShiftSaved();
  const known = useQuery(references.tasks(siteId));
  const form = useSchemaForm(ShiftCorrection, {
    defaultValues: bodyOf(shift),
    keepAs: shift.shiftId,
  });
  const rows = useFieldArray({ control: form.control, name: "tasks" });
  const nameOf = (id: string) =>
    known.data?.rows.find((task) => task.id === id)?.name ??
    shift.revisions.flatMap(({ tasks }) => tasks).find(({ taskId }) => taskId === id)?.taskName ??
    "–";
  const change = useRevisedSave<Correction, Shift>({
    path: () => `/shifts/${shift.shiftId}`,
    schema: ShiftView,
    toBody: (saved) => {
      const { reason: _, ...facts } = bodyOf(saved);
      return facts;
    },
    onSaved: (next) => {
      saved(next);
      onDone();
    },
    onError: showIssuesOn(form, i18n),
  });
  const used = new Set((form.watch("tasks") ?? []).map(({ taskId }) => taskId));
  const free = (known.data?.rows ?? []).filter(
    ({ id, isArchived }) => !isArchived && !used.has(id),
  );
  const how = form.watch("unaccounted.how");
  const lengthMin = form.watch("lengthMin");
  const endsAhead = isEndAhead(
    shift.date,
    { localStart: form.watch("localStart"), whichHour: form.watch("whichHour") ?? null, lengthMin },
    shift.timeZone,
    Date.now(),
  );
  const tasksWords = (tasks: Correction["tasks"]) =>
    tasks
      .map(({ taskId, durationMin }) => `${nameOf(taskId)} ${formatDuration(durationMin, locale)}`)
      .join(", ");
  const fields: ConflictField<Correction>[] = [
    { key: "localStart", label: i18n.t("Start"), show: ({ localStart }) => localStart },
    {
      key: "lengthMin",
      label: i18n.t("Length"),
      show: (body) => formatDuration(body.lengthMin, locale),
    },
    {
      key: "tasks",
      label: i18n.t("Tasks"),
      show: ({ tasks }) => tasksWords(tasks),
    },
    {
      key: "unaccounted",
      label: i18n.t("Time not accounted for"),
      show: ({ unaccounted }) => unaccountedWords(i18n, locale, unaccounted ?? { how: "unknown" }),
    },
    { key: "note", label: i18n.t("Note"), show: ({ note }) => note ?? "–" },
  ];
  const sumError =
    form.formState.errors.tasks?.root?.message ??
    (form.formState.errors.tasks as { message?: string } | undefined)?.message;
  return (
    <>
      <Form
        aria-label={i18n.t("Correct this shift")}
        onSubmit={form.handleSubmit((body) => change.save(body, shift.revision))}
      >
        <TimeField form={form} name="localStart" label={i18n.t("Start")} />
        <DurationField
          form={form}
          name="lengthMin"
          label={i18n.t("Length")}
          unit="min"
          note={i18n.t("450, 7:30 or 7.5h.")}
        />
        <table className="task-rows">
          <caption className="sr-only">{i18n.t("Tasks of the shift")}</caption>
          <thead>
            <tr>
              <th scope="col">{i18n.t("Task")}</th>
              <th scope="col">{i18n.t("Minutes")}</th>
              <th scope="col">{i18n.t("Protector worn, %")}</th>
              <th scope="col">
                <span className="sr-only">{i18n.t("Change")}</span>
              </th>
            </tr>
          </thead>
          <tbody>
            {rows.fields.map((row, index) => (
              <tr key={row.id}>
                <th scope="row">{nameOf(row.taskId)}</th>
                <td>
                  <DurationField
                    form={form}
                    name={`tasks.${index}.durationMin`}
                    label={i18n.t("Minutes in {task}", { task: nameOf(row.taskId) })}
                  />
                </td>
                <td>
                  <NumberField
                    form={form}
                    name={`tasks.${index}.wornPct`}
                    label={i18n.t("Worn in {task}, %", { task: nameOf(row.taskId) })}
                    isOptional
                  />
                </td>
                <td>
                  <TextButton onClick={() => rows.remove(index)}>
                    {i18n.t("Take out")}
                    <span className="sr-only">{nameOf(row.taskId)}</span>
                  </TextButton>
                </td>
              </tr>
            ))}
          </tbody>
        </table>
        {sumError && (
          <p className="field-error" role="alert">
            {sumError}
          </p>
        )}
        {free.length > 0 && (
          <div className="field">
            <label className="field-label" htmlFor="add-task">
              {i18n.t("Add a task")}
            </label>
            <div className="field-line">
              <select
                id="add-task"
                className="input"
                value=""
                onChange={(event) => {
                  const taskId = event.target.value;
                  if (taskId)
                    rows.append({
                      taskId,
                      durationMin: null as unknown as number,
                      wornPct: null,
                      wornIsShiftWide: false,
                    });
                }}
              >
                <option value="">{i18n.t("Choose one")}</option>
                {free.map(({ id, name }) => (
                  <option key={id} value={id}>
                    {name}
                  </option>
                ))}
              </select>
            </div>
          </div>
        )}
        <SelectField
          form={form}
          name="unaccounted.how"
          label={i18n.t("Time not accounted for")}
          choices={[
            { value: "unknown", label: i18n.t("not known") },
            { value: "like-the-rest", label: i18n.t("like the rest") },
            { value: "quiet", label: i18n.t("quiet") },
          ]}
        />
        {how === "quiet" && (
          <NumberField
            form={form}
            name="unaccounted.levelDb"
            label={i18n.t("Level there")}
            unit="dB(A)"
          />
        )}
        {lengthMin === 1440 && (
          <CheckField
            form={form}
            name="confirmsWholeDay"
            label={i18n.t("24 hours")}
            text={i18n.t("Yes, the shift was exactly 24 hours long")}
          />
        )}
        {endsAhead && (
          <CheckField
            form={form}
            name="confirmsOpenEnd"
            label={i18n.t("End of the shift")}
            text={i18n.t("Yes, it will end so; its end still lies ahead")}
          />
        )}
        <TextAreaField form={form} name="note" label={i18n.t("Note")} rows={2} isOptional />
        <TextAreaField form={form} name="reason" label={i18n.t("Why it is corrected")} rows={2} />
        <FormProblem error={change.error} />
        <FormActions>
          <SubmitButton isBusy={change.isSaving}>
            {i18n.t("Save revision {number}", { number: shift.revision + 1 })}
          </SubmitButton>
          <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
        </FormActions>
      </Form>
      {change.conflict && (
        <ConflictDialog
          title={i18n.t("Someone saved this shift before you")}
          conflict={change.conflict}
          toBody={bodyOf}
          savedBy={({ revisions, revision, timeZone }) => {
            const last = revisions.find(({ number }) => number === revision);
            return [last?.authorName, last && formatInstant(last.at, timeZone, locale)]
              .filter(Boolean)
              .join(", ");
          }}
          fields={fields}
          isSaving={change.isSaving}
          onSave={change.save}
          onKeepSaved={(current) => {
            saved(current);
            onDone();
          }}
          onClose={change.leaveConflict}
        />
      )}
    </>
  );
}

/** "Run-up 130 min, worn 100 %" */
export function taskWords(
  i18n: ReturnType<typeof useLingui>["i18n"],
  locale: ReturnType<typeof useLocale>,
  task: Shift["revisions"][number]["tasks"][number],
): string {
  const time = `${task.taskName} ${formatDuration(task.durationMin, locale)}`;
  return task.wornPct === null
    ? time
    : i18n.t("{time}, worn {share}", { time, share: formatShare(task.wornPct, locale) });
}
