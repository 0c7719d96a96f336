import { useLingui } from "@lingui/react";
import { useMutation, useQuery, useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import {
  CrewDetail,
  DatedEnd,
  MembershipInput,
  SupervisorInput,
  SupervisorNameList,
} from "../../../shared/schemas/crew";
import { WorkerPage } from "../../../shared/schemas/worker";
import { Button } from "../../components/button";
import { ComboboxField } from "../../components/combobox-field";
import { ConflictDialog } from "../../components/conflict-dialog";
import {
  CheckField,
  DateField,
  Form,
  FormActions,
  SelectField,
  SubmitButton,
  showIssuesOn,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { api } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { useRevisedSave } from "../../lib/revised-save";
import { crewQueries } from "./queries";

export type Span = "memberships" | "supervisors";

function useTakeCrew(onDone: () => void) {
  const client = useQueryClient();
  return (view: CrewDetail) => {
    client.setQueryData(crewQueries.one(view.id).queryKey, view);
    void client.invalidateQueries({ queryKey: crewQueries.all });
    onDone();
  };
}

/** A worker joins the crew, or is lent to it, from a date on. */
export function MemberForm({
  crew,
  today,
  onDone,
}: {
  crew: CrewDetail;
  today: string;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const changeKey = useChangeKey();
  const take = useTakeCrew(onDone);
  const form = useSchemaForm(MembershipInput, {
    defaultValues: { workerId: "", fromDate: today, toDate: null, isLoan: false },
  });
  const add = useMutation({
    mutationFn: (body: z.output<typeof MembershipInput>) =>
      api.post(`/crews/${crew.id}/memberships`, {
        body,
        schema: CrewDetail,
        idempotencyKey: changeKey.keyFor(body),
      }),
    onSuccess: (view) => {
      changeKey.forget();
      take(view);
    },
    onError: showIssuesOn(form, i18n),
  });
  return (
    <Form
      aria-label={i18n.t("New member")}
      onSubmit={form.handleSubmit((body) => add.mutate(body))}
    >
      <ComboboxField
        form={form}
        name="workerId"
        label={i18n.t("Worker")}
        note={i18n.t(
          "Name or number. Of another crew of their own they are a member until the day before.",
        )}
        search={async (search, signal) => {
          const { rows } = await api.get("/workers", {
            query: { search, siteId: crew.siteId, limit: 20 },
            schema: WorkerPage,
            signal,
          });
          return rows.map(({ id, name, employeeNumber, crewName }) => ({
            value: id,
            label: name,
            note: [employeeNumber, crewName].filter(Boolean).join(", "),
          }));
        }}
      />
      <DateField form={form} name="fromDate" label={i18n.t("First day")} />
      <DateField
        form={form}
        name="toDate"
        label={i18n.t("Last day")}
        isOptional
        note={i18n.t("Empty: until further notice.")}
      />
      <CheckField
        form={form}
        name="isLoan"
        label={i18n.t("On loan")}
        text={i18n.t("Lent to this crew by another one")}
      />
      <FormProblem error={add.error} />
      <FormActions>
        <SubmitButton isBusy={add.isPending}>{i18n.t("Add")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
      </FormActions>
    </Form>
  );
}

/** A supervisor sees the days of the crew from a date on. */
export function SupervisorForm({
  crew,
  today,
  onDone,
}: {
  crew: CrewDetail;
  today: string;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const changeKey = useChangeKey();
  const take = useTakeCrew(onDone);
  const people = useQuery({
    queryKey: ["supervisors", crew.siteId],
    queryFn: ({ signal }) =>
      api.get("/supervisors", {
        query: { siteId: crew.siteId },
        schema: SupervisorNameList,
        signal,
      }),
  });
  const form = useSchemaForm(SupervisorInput, {
    defaultValues: { userId: "", fromDate: today, toDate: null },
  });
  const add = useMutation({
    mutationFn: (body: z.output<typeof SupervisorInput>) =>
      api.post(`/crews/${crew.id}/supervisors`, {
        body,
        schema: CrewDetail,
        idempotencyKey: changeKey.keyFor(body),
      }),
    onSuccess: (view) => {
      changeKey.forget();
      take(view);
    },
    onError: showIssuesOn(form, i18n),
  });
  return (
    <Form
      aria-label={i18n.t("New supervisor")}
      onSubmit={form.handleSubmit((body) => add.mutate(body))}
    >
      <SelectField
        form={form}
        name="userId"
        label={i18n.t("Supervisor")}
        emptyLabel={i18n.t("Choose")}
        choices={(people.data?.rows ?? []).map(({ id, name }) => ({ value: id, label: name }))}
        note={i18n.t("An administrator grants the role; whoever has it at this site stands here.")}
      />
      <DateField form={form} name="fromDate" label={i18n.t("First day")} />
      <DateField
        form={form}
        name="toDate"
        label={i18n.t("Last day")}
        isOptional
        note={i18n.t("Empty: until further notice.")}
      />
      <FormProblem error={add.error ?? people.error} />
      <FormActions>
        <SubmitButton isBusy={add.isPending}>{i18n.t("Add")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
      </FormActions>
    </Form>
  );
}

/** The last day of a membership, or of a supervisor with the crew. */
export function EndSpanForm({
  crew,
  kind,
  spanId,
  name,
  lastDay,
  onDone,
}: {
  crew: CrewDetail;
  kind: Span;
  spanId: string;
  name: string;
  lastDay: string;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const take = useTakeCrew(onDone);
  const form = useSchemaForm(DatedEnd, { defaultValues: { toDate: lastDay }, keepAs: spanId });
  const toBody = (saved: CrewDetail) => ({
    toDate: saved[kind].find(({ id }) => id === spanId)?.toDate ?? "",
  });
  const end = useRevisedSave<z.output<typeof DatedEnd>, CrewDetail>({
    path: () => `/crews/${crew.id}/${kind}/${spanId}`,
    method: "patch",
    schema: CrewDetail,
    toBody,
    onSaved: take,
    onError: showIssuesOn(form, i18n),
  });
  return (
    <>
      <Form
        labels="above"
        aria-label={i18n.t("Last day of {name}", { name })}
        onSubmit={form.handleSubmit((body) => end.save(body, crew.revision))}
      >
        <DateField form={form} name="toDate" label={i18n.t("Last day of {name}", { name })} />
        <FormProblem error={end.error} />
        <FormActions>
          <SubmitButton isBusy={end.isSaving}>{i18n.t("Save")}</SubmitButton>
          <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
        </FormActions>
      </Form>
      {end.conflict && (
        <ConflictDialog
          title={i18n.t("Someone saved this crew before you")}
          conflict={end.conflict}
          toBody={toBody}
          fields={[
            {
              key: "toDate",
              label: i18n.t("Last day of {name}", { name }),
              show: ({ toDate }) => toDate || i18n.t("open"),
            },
          ]}
          isSaving={end.isSaving}
          onSave={end.save}
          onKeepSaved={take}
          onClose={end.leaveConflict}
        />
      )}
    </>
  );
}
