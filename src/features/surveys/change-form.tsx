import { useLingui } from "@lingui/react";
import { useMutation, useQuery, useQueryClient } from "@tanstack/react-query";
import { useState } from "react";
import {
  WorkplaceChangeInput,
  WorkplaceChangeStrike,
  WorkplaceChangeView,
} from "../../../shared/schemas/workplace-change";
import { changeKindTitle } from "../../../shared/surveys/words";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
import {
  type Choice,
  DateField,
  Field,
  Form,
  FormActions,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { api } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { references } from "../../lib/references";
import { workplaceChangeQueries } from "./queries";

const KINDS = ["process", "machine", "control", "work-pattern"] as const;
const SUBJECTS = ["task", "area", "job"] as const;
type Subject = (typeof SUBJECTS)[number];

/** A change to process, machine, control or pattern of work, once it has happened. */
export function ChangeForm({
  siteId: firstSite,
  sites,
  todayAt,
  jobsOf,
  onDone,
}: {
  siteId: string;
  sites: readonly Choice[];
  todayAt: (siteId: string) => string;
  jobsOf: (siteId: string) => readonly Choice[];
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const changeKey = useChangeKey();
  const [subject, setSubject] = useState<Subject>("task");
  const form = useSchemaForm(WorkplaceChangeInput, {
    defaultValues: {
      siteId: firstSite,
      areaId: null,
      taskId: null,
      jobId: null,
      kind: "process",
      happenedOn: todayAt(firstSite),
      what: "",
    },
  });
  const siteId = form.watch("siteId");
  const tasks = useQuery(references.tasks(siteId));
  const areas = useQuery(references.areas(siteId));
  const named = (rows: readonly { id: string; name: string; isArchived: boolean }[] | undefined) =>
    (rows ?? [])
      .filter(({ isArchived }) => !isArchived)
      .map(({ id, name }) => ({ value: id, label: name }));
  const save = useMutation({
    mutationFn: (body: WorkplaceChangeInput) =>
      api.post("/workplace-changes", {
        body,
        schema: WorkplaceChangeView,
        idempotencyKey: changeKey.keyFor(body),
      }),
    onSuccess: () => {
      changeKey.forget();
      void client.invalidateQueries({ queryKey: workplaceChangeQueries.all });
      void client.invalidateQueries({ queryKey: ["measuring-needs"] });
      onDone();
    },
    onError: showIssuesOn(form, i18n),
  });
  const words: Record<Subject, string> = {
    task: i18n.t("a task"),
    area: i18n.t("an area"),
    job: i18n.t("a job, with all its tasks"),
  };
  const choose = (next: Subject) => {
    setSubject(next);
    for (const name of ["taskId", "areaId", "jobId"] as const) form.setValue(name, null);
    form.clearErrors();
  };
  return (
    <Form
      aria-label={i18n.t("New change")}
      onSubmit={form.handleSubmit((body) => save.mutate(body))}
    >
      {sites.length > 1 && (
        <SelectField form={form} name="siteId" label={i18n.t("Site")} choices={sites} />
      )}
      <SelectField
        form={form}
        name="kind"
        label={i18n.t("What kind")}
        choices={KINDS.map((kind) => ({ value: kind, label: changeKindTitle(i18n, kind) }))}
      />
      <Field label={i18n.t("Made to")} isGroup error={undefined}>
        {() =>
          SUBJECTS.map((one) => (
            <label key={one} className="choice">
              <input
                type="radio"
                name="subject"
                checked={subject === one}
                onChange={() => choose(one)}
              />
              <span>{words[one]}</span>
            </label>
          ))
        }
      </Field>
      {subject === "task" && (
        <SelectField
          form={form}
          name="taskId"
          label={i18n.t("Task")}
          emptyLabel={i18n.t("Choose")}
          choices={named(tasks.data?.rows)}
        />
      )}
      {subject === "area" && (
        <SelectField
          form={form}
          name="areaId"
          label={i18n.t("Area")}
          emptyLabel={i18n.t("Choose")}
          choices={named(areas.data?.rows)}
        />
      )}
      {subject === "job" && (
        <SelectField
          form={form}
          name="jobId"
          label={i18n.t("Job")}
          emptyLabel={i18n.t("Choose")}
          choices={jobsOf(siteId)}
        />
      )}
      <DateField form={form} name="happenedOn" label={i18n.t("Since when")} />
      <TextAreaField form={form} name="what" label={i18n.t("What has changed")} rows={3} />
      <FormProblem error={save.error} />
      <FormActions>
        <SubmitButton isBusy={save.isPending}>{i18n.t("Enter the change")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
      </FormActions>
    </Form>
  );
}

/** An entry made by mistake is struck, with the reason, and stays on the register. */
export function StrikeChange({
  change,
  onDone,
}: {
  change: WorkplaceChangeView;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const form = useSchemaForm(WorkplaceChangeStrike, {
    defaultValues: { reason: "" },
    keepAs: change.id,
  });
  const strike = useMutation({
    mutationFn: (body: { reason: string }) =>
      api.post(`/workplace-changes/${change.id}/strike`, {
        body,
        ifMatch: String(change.revision),
        schema: WorkplaceChangeView,
      }),
    onSuccess: onDone,
    onError: showIssuesOn(form, i18n),
    onSettled: () => {
      void client.invalidateQueries({ queryKey: workplaceChangeQueries.all });
      void client.invalidateQueries({ queryKey: ["measuring-needs"] });
    },
  });
  const submit = form.handleSubmit((body) => strike.mutate(body));
  return (
    <Dialog
      isOpen
      onClose={onDone}
      title={i18n.t("Strike this entry")}
      lead={i18n.t("It stays on the register, struck, and asks for no measuring any more.")}
      actions={
        <>
          <Button kind="primary" isBusy={strike.isPending} onClick={() => void submit()}>
            {i18n.t("Strike it")}
          </Button>
          <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
        </>
      }
    >
      <Form labels="above" aria-label={i18n.t("Strike this entry")} onSubmit={submit}>
        <TextAreaField form={form} name="reason" label={i18n.t("Reason")} rows={2} />
        <FormProblem error={strike.error} />
      </Form>
    </Dialog>
  );
}
