import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { TermInput, TermView } from "../../../shared/schemas/retention";
import {
  Form,
  FormActions,
  NumberField,
  SubmitButton,
  showIssuesOn,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useRevisedSave } from "../../lib/revised-save";
import { retentionQueries } from "./retention-queries";

/** The organization's own term after leaving. */
export function TermForm({ term, onSaved }: { term: TermView; onSaved: () => void }) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const form = useSchemaForm(TermInput, {
    defaultValues: { yearsAfterLeaving: term.yearsAfterLeaving },
    keepAs: "/retention",
  });
  const save = useRevisedSave<TermInput, TermView>({
    path: () => "/retention",
    schema: TermView,
    toBody: ({ yearsAfterLeaving }) => ({ yearsAfterLeaving }),
    onSaved: () => {
      void client.invalidateQueries({ queryKey: retentionQueries.all });
      onSaved();
    },
    onError: showIssuesOn(form, i18n),
  });
  return (
    <Form
      aria-label={i18n.t("The organization’s own term")}
      onSubmit={form.handleSubmit((body) =>
        save.save(body, save.conflict?.saved.revision ?? term.revision),
      )}
    >
      <NumberField
        form={form}
        name="yearsAfterLeaving"
        label={i18n.t("After leaving")}
        unit={i18n.t("years")}
        isOptional
        note={i18n.t(
          "Counts where it is longer than a rule’s term, and where a rule sets none. Left empty: there is none.",
        )}
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
