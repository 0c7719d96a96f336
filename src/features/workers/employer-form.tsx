import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { DUTY_BEARERS, EMPLOYER_DUTIES } from "../../../shared/rule-sets/employer-duties";
import { EmployerDutiesInput, EmployerView } from "../../../shared/schemas/employer";
import {
  Form,
  FormActions,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { bearerWord, dutyWord } from "../../lib/employer-words";
import { useRevisedSave } from "../../lib/revised-save";
import { employerQueries } from "./employer-queries";

/** What was agreed with one employer: each duty has one who bears it. */
export function EmployerForm({
  siteId,
  employer,
  name,
  onSaved,
}: {
  siteId: string;
  employer: EmployerView;
  name: string;
  onSaved: () => void;
}) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const { kind, agreed, usual } = employer;
  const start = agreed ?? usual?.duties;
  const form = useSchemaForm(EmployerDutiesInput, {
    defaultValues: {
      kind,
      name,
      measure: start?.measure,
      protect: start?.protect,
      train: start?.train,
      keep: start?.keep,
      tell: start?.tell,
      basis: agreed?.basis ?? "",
    },
    keepAs: `/employers ${siteId} ${kind} ${name}`,
  });
  const save = useRevisedSave<EmployerDutiesInput, EmployerView>({
    path: () => `/sites/${siteId}/employers`,
    schema: EmployerView,
    toBody: (saved) => ({
      ...(saved.agreed && {
        measure: saved.agreed.measure,
        protect: saved.agreed.protect,
        train: saved.agreed.train,
        keep: saved.agreed.keep,
        tell: saved.agreed.tell,
        basis: saved.agreed.basis,
      }),
    }),
    onSaved: () => {
      void client.invalidateQueries({ queryKey: employerQueries.all });
      onSaved();
    },
    onError: showIssuesOn(form, i18n),
  });
  return (
    <Form
      aria-label={i18n.t("Agreed with {name}", { name })}
      onSubmit={form.handleSubmit((body) =>
        save.save(body, save.conflict?.saved.revision ?? employer.revision),
      )}
    >
      {EMPLOYER_DUTIES.map((duty) => (
        <SelectField
          key={duty}
          form={form}
          name={duty}
          label={dutyWord(i18n, duty)}
          emptyLabel={start ? undefined : i18n.t("not agreed")}
          choices={DUTY_BEARERS.map((bearer) => ({
            value: bearer,
            label: bearerWord(i18n, bearer),
          }))}
        />
      ))}
      <TextAreaField
        form={form}
        name="basis"
        rows={2}
        label={i18n.t("Agreed in")}
        note={i18n.t("The contract or letter, and where it is kept.")}
      />
      <FormProblem error={save.error} />
      {save.conflict && (
        <p className="field-error" role="alert">
          {i18n.t("It was changed in another window meanwhile. Look at it and save again.")}
        </p>
      )}
      <FormActions>
        <SubmitButton isBusy={save.isSaving}>{i18n.t("Save")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
