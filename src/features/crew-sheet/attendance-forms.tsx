import { useLingui } from "@lingui/react";
import type { z } from "zod";
import { AbsenceInput, type AttendanceView, LoanInput } from "../../../shared/schemas/attendance";
import { DatedEnd } from "../../../shared/schemas/crew";
import { Button } from "../../components/button";
import {
  DateField,
  Form,
  FormActions,
  SelectField,
  SubmitButton,
  showIssuesOn,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useChangeAttendance } from "./attendance-queries";

const choicesOf = (people: readonly { id: string; name: string }[]) =>
  people.map(({ id, name }) => ({ value: id, label: name }));

/** Somebody is not in from a day on. */
export function AbsenceForm({ view, onDone }: { view: AttendanceView; onDone: () => void }) {
  const { i18n } = useLingui();
  const form = useSchemaForm(AbsenceInput, {
    defaultValues: { workerId: "", fromDate: view.today, toDate: view.today },
    keepAs: "absence",
  });
  const change = useChangeAttendance(view.crew.id);
  return (
    <Form
      labels="above"
      aria-label={i18n.t("Not in")}
      onSubmit={form.handleSubmit((body: z.output<typeof AbsenceInput>) =>
        change.start(
          { path: "absences", method: "post", body, revision: null },
          { onSuccess: onDone, onError: showIssuesOn(form, i18n) },
        ),
      )}
    >
      <SelectField
        form={form}
        name="workerId"
        label={i18n.t("Who")}
        emptyLabel={i18n.t("Choose")}
        choices={choicesOf(view.members)}
      />
      <DateField form={form} name="fromDate" label={i18n.t("First day")} />
      <DateField
        form={form}
        name="toDate"
        label={i18n.t("Last day")}
        isOptional
        note={i18n.t("Empty: until further notice.")}
      />
      <FormProblem error={change.error} />
      <FormActions>
        <SubmitButton size="supervisor" isBusy={change.isPending}>
          {i18n.t("Mark as not in")}
        </SubmitButton>
        <Button size="supervisor" onClick={onDone}>
          {i18n.t("Cancel")}
        </Button>
      </FormActions>
    </Form>
  );
}

/** One of the crew's own works with another crew of the site. */
export function LoanForm({ view, onDone }: { view: AttendanceView; onDone: () => void }) {
  const { i18n } = useLingui();
  const form = useSchemaForm(LoanInput, {
    defaultValues: { workerId: "", crewId: "", fromDate: view.today, toDate: view.today },
    keepAs: "loan",
  });
  const change = useChangeAttendance(view.crew.id);
  return (
    <Form
      labels="above"
      aria-label={i18n.t("Lend somebody")}
      onSubmit={form.handleSubmit((body: z.output<typeof LoanInput>) =>
        change.start(
          { path: "loans", method: "post", body, revision: null },
          { onSuccess: onDone, onError: showIssuesOn(form, i18n) },
        ),
      )}
    >
      <SelectField
        form={form}
        name="workerId"
        label={i18n.t("Who")}
        emptyLabel={i18n.t("Choose")}
        choices={choicesOf(view.members.filter(({ isLoan }) => !isLoan))}
      />
      <SelectField
        form={form}
        name="crewId"
        label={i18n.t("To which crew")}
        emptyLabel={i18n.t("Choose")}
        choices={choicesOf(view.otherCrews)}
      />
      <DateField form={form} name="fromDate" label={i18n.t("First day")} />
      <DateField form={form} name="toDate" label={i18n.t("Last day")} />
      <FormProblem error={change.error} />
      <FormActions>
        <SubmitButton size="supervisor" isBusy={change.isPending}>
          {i18n.t("Lend")}
        </SubmitButton>
        <Button size="supervisor" onClick={onDone}>
          {i18n.t("Cancel")}
        </Button>
      </FormActions>
    </Form>
  );
}

/** The last day of an absence or a loan. */
export function LastDayForm({
  view,
  part,
  span,
  onDone,
}: {
  view: AttendanceView;
  part: "absences" | "loans";
  span: AttendanceView["absences"][number];
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const label = i18n.t("Last day of {name}", { name: span.worker.name });
  const form = useSchemaForm(DatedEnd, {
    defaultValues: { toDate: span.toDate ?? view.today },
    keepAs: span.id,
  });
  const change = useChangeAttendance(view.crew.id);
  return (
    <Form
      labels="above"
      aria-label={label}
      onSubmit={form.handleSubmit((body: z.output<typeof DatedEnd>) =>
        change.start(
          { path: `${part}/${span.id}`, method: "patch", body, revision: span.revision },
          { onSuccess: onDone, onError: showIssuesOn(form, i18n) },
        ),
      )}
    >
      <DateField form={form} name="toDate" label={label} />
      <FormProblem error={change.error} />
      <FormActions>
        <SubmitButton size="supervisor" isBusy={change.isPending}>
          {i18n.t("Save")}
        </SubmitButton>
        <Button size="supervisor" onClick={onDone}>
          {i18n.t("Cancel")}
        </Button>
      </FormActions>
    </Form>
  );
}
