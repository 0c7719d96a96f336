import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { useState } from "react";
import { z } from "zod";
import { LOCALE_NAMES, LOCALES, localeOf } from "../../../shared/i18n/index";
import { type KeeperInput, KeeperPerson, KeeperView } from "../../../shared/schemas/trail-keeper";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
import {
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
import { keeperQuery } from "./queries";

const languages = LOCALES.map((value) => ({ value, label: LOCALE_NAMES[value] }));
const Named = z.object({ keeper: KeeperPerson });

/** Who gets the head from now on; or nobody. */
export function KeeperForm({
  view,
  onSaved,
}: {
  view: KeeperView;
  onSaved: (saved: KeeperView) => void;
}) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const [isStopping, setIsStopping] = useState(false);
  const { keeper, timeZones } = view;
  const form = useSchemaForm(Named, {
    defaultValues: {
      keeper: keeper ?? {
        name: "",
        email: "",
        language: localeOf(i18n),
        timeZone: timeZones[0] ?? "",
      },
    },
    keepAs: "/trail-keeper",
  });
  const save = useRevisedSave<KeeperInput, KeeperView>({
    path: () => "/trail-keeper",
    schema: KeeperView,
    toBody: (saved) => ({ keeper: saved.keeper }),
    onSaved: (saved) => {
      setIsStopping(false);
      client.setQueryData(keeperQuery.queryKey, saved);
      onSaved(saved);
    },
    onError: showIssuesOn(form, i18n),
  });
  const revision = save.conflict?.saved.revision ?? view.revision;
  return (
    <Form
      aria-label={i18n.t("Who keeps the head")}
      onSubmit={form.handleSubmit((body) => save.save(body, revision))}
    >
      <TextField
        form={form}
        name="keeper.name"
        label={i18n.t("Name")}
        inputProps={{ autoComplete: "off" }}
      />
      <TextField
        form={form}
        name="keeper.email"
        label={i18n.t("E-mail")}
        note={i18n.t("An address whose mails nobody here can delete.")}
        inputProps={{ type: "email", autoComplete: "off" }}
      />
      <SelectField
        form={form}
        name="keeper.language"
        label={i18n.t("Language")}
        choices={languages}
      />
      <SelectField
        form={form}
        name="keeper.timeZone"
        label={i18n.t("Clock")}
        note={i18n.t("The mail goes on Mondays at 07:00 by this clock.")}
        choices={timeZones.map((zone) => ({ value: zone, label: zone }))}
      />
      <FormProblem error={save.error} />
      {save.conflict && (
        <p className="field-error" role="alert">
          {i18n.t("It was changed in another window meanwhile. Look at it and save again.")}
        </p>
      )}
      <FormActions>
        <SubmitButton isBusy={save.isSaving}>{i18n.t("Save")}</SubmitButton>
        {keeper && (
          <Button type="button" onClick={() => setIsStopping(true)}>
            {i18n.t("Send it to nobody")}
          </Button>
        )}
      </FormActions>
      <Dialog
        isOpen={isStopping}
        onClose={() => setIsStopping(false)}
        title={i18n.t("Send the head to nobody any more?")}
        lead={i18n.t(
          "{name} is told. Without a head outside, whoever rewrites the whole trail is not found out.",
          { name: keeper?.name ?? "" },
        )}
        actions={
          <>
            <Button
              kind="primary"
              isBusy={save.isSaving}
              onClick={() => save.save({ keeper: null }, revision)}
            >
              {i18n.t("Send it to nobody")}
            </Button>
            <Button onClick={() => setIsStopping(false)}>{i18n.t("Leave as it was")}</Button>
          </>
        }
      />
    </Form>
  );
}
