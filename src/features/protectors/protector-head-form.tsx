import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import { ProtectorDetail, ProtectorInput } from "../../../shared/schemas/protector";
import { protectorKindWord } from "../../../shared/words/register-words";
import { Button } from "../../components/button";
import { ConflictDialog } from "../../components/conflict-dialog";
import {
  CheckField,
  Form,
  FormActions,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useRevisedSave } from "../../lib/revised-save";
import { protectorKinds } from "./kinds";
import { protectorQueries } from "./queries";

type Detail = z.infer<typeof ProtectorDetail>;
type Input = z.infer<typeof ProtectorInput>;

const toBody = ({ name, kind, isArchived }: Detail): Input => ({ name, kind, isArchived });

/** Name, kind and whether it is still given out. */
export function ProtectorHeadForm({
  protector,
  onDone,
}: {
  protector: Detail;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const form = useSchemaForm(ProtectorInput, { defaultValues: toBody(protector) });
  const take = (view: Detail) => {
    client.setQueryData(protectorQueries.one(view.id).queryKey, view);
    void client.invalidateQueries({ queryKey: protectorQueries.all });
    onDone();
  };
  const saving = useRevisedSave<Input, Detail>({
    path: () => `/protectors/${protector.id}`,
    schema: ProtectorDetail,
    toBody,
    onSaved: take,
    onError: showIssuesOn(form, i18n),
  });
  return (
    <>
      <Form
        aria-label={i18n.t("Name and kind")}
        onSubmit={form.handleSubmit((body) => saving.save(body, protector.revision))}
      >
        <TextField form={form} name="name" label={i18n.t("Name")} />
        <SelectField
          form={form}
          name="kind"
          label={i18n.t("Kind")}
          choices={protectorKinds(i18n)}
          note={i18n.t("It stays once somebody has worn it: a derating by type rests on it.")}
        />
        <CheckField
          form={form}
          name="isArchived"
          label={i18n.t("Giving out")}
          text={i18n.t("No longer given out; who has it keeps it")}
        />
        <FormProblem error={saving.error} />
        <FormActions>
          <SubmitButton isBusy={saving.isSaving}>{i18n.t("Save")}</SubmitButton>
          <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
        </FormActions>
      </Form>
      {saving.conflict && (
        <ConflictDialog
          title={i18n.t("Someone saved this protector before you")}
          conflict={saving.conflict}
          toBody={toBody}
          fields={[
            { key: "name", label: i18n.t("Name"), show: ({ name }) => name },
            {
              key: "kind",
              label: i18n.t("Kind"),
              show: ({ kind }) => protectorKindWord(i18n, kind),
            },
            {
              key: "isArchived",
              label: i18n.t("Giving out"),
              show: ({ isArchived }) =>
                isArchived ? i18n.t("no longer given out") : i18n.t("given out"),
            },
          ]}
          isSaving={saving.isSaving}
          onSave={saving.save}
          onKeepSaved={take}
          onClose={saving.leaveConflict}
        />
      )}
    </>
  );
}
