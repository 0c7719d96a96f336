import { useLingui } from "@lingui/react";
import { RecordTransferInput } from "../../../shared/schemas/record-transfer";
import {
  DateField,
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  TextField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useProposeTransfer } from "./transfer-queries";

/** Proposes to hand a site's records over to the employer that follows. */
export function TransferForm({ siteId, onProposed }: { siteId: string; onProposed: () => void }) {
  const { i18n } = useLingui();
  const form = useSchemaForm(RecordTransferInput, {
    defaultValues: { siteId, successor: "", passesOn: "", note: "" },
    keepAs: `/record-transfers new ${siteId}`,
  });
  const propose = useProposeTransfer(() => {
    form.reset();
    onProposed();
  });
  return (
    <Form
      aria-label={i18n.t("Propose to hand records over")}
      onSubmit={form.handleSubmit((body) =>
        propose.start(body, { onError: showIssuesOn(form, i18n) }),
      )}
    >
      <TextField
        form={form}
        name="successor"
        label={i18n.t("Successor")}
        note={i18n.t("The employer that follows.")}
      />
      <DateField
        form={form}
        name="passesOn"
        label={i18n.t("Passes on")}
        note={i18n.t("The day on which the site ends here or is sold.")}
      />
      <TextAreaField form={form} name="note" rows={2} label={i18n.t("Note")} isOptional />
      <FormProblem error={propose.error} />
      <FormActions>
        <SubmitButton isBusy={propose.isPending}>{i18n.t("Propose")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
