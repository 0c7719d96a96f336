import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { useState } from "react";
import { MeasuringNeeds, RemeasureInput } from "../../../shared/schemas/survey";
import { Button } from "../../components/button";
import {
  Form,
  FormActions,
  NumberField,
  SubmitButton,
  showIssuesOn,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { useRevisedSave } from "../../lib/revised-save";

type SiteInterval = MeasuringNeeds["sites"][number];

/** After how many months a site measures again, and its change. */
export function RemeasureInterval({ site }: { site: SiteInterval }) {
  const { i18n } = useLingui();
  const [isOpen, setIsOpen] = useState(false);
  const { remeasureAfterMonths } = site;
  if (isOpen) return <IntervalForm site={site} onDone={() => setIsOpen(false)} />;
  return (
    <p>
      {site.name}:{" "}
      {remeasureAfterMonths === null
        ? i18n.t("no interval stated, so no level is ever too old")
        : i18n.t("{months, plural, one {after # month} other {after # months}}", {
            months: remeasureAfterMonths,
          })}{" "}
      {site.can.changeRules && (
        <TextButton
          aria-label={i18n.t("Change the interval of {site}", { site: site.name })}
          onClick={() => setIsOpen(true)}
        >
          {i18n.t("Change")}
        </TextButton>
      )}
    </p>
  );
}

function IntervalForm({ site, onDone }: { site: SiteInterval; onDone: () => void }) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const form = useSchemaForm(RemeasureInput, {
    keepAs: site.id,
    defaultValues: { remeasureAfterMonths: site.remeasureAfterMonths },
  });
  const done = () => {
    void client.invalidateQueries({ queryKey: ["measuring-needs"] });
    void client.invalidateQueries({ queryKey: ["sites"] });
    onDone();
  };
  const { save, isSaving, error, conflict } = useRevisedSave<RemeasureInput, SiteInterval>({
    path: () => `/sites/${site.id}/remeasuring`,
    schema: MeasuringNeeds.shape.sites.element,
    toBody: ({ remeasureAfterMonths }) => ({ remeasureAfterMonths }),
    onSaved: done,
    onError: showIssuesOn(form, i18n),
  });
  // One number: whoever comes second sees what stands and may type it again.
  const revision = conflict?.saved.revision ?? site.revision;
  return (
    <Form
      labels="above"
      aria-label={i18n.t("Interval of {site}", { site: site.name })}
      onSubmit={form.handleSubmit((body) => save(body, revision))}
    >
      <NumberField
        form={form}
        name="remeasureAfterMonths"
        label={site.name}
        unit={i18n.t("months")}
        isOptional
        note={i18n.t("Empty: the site states none.")}
      />
      {conflict && (
        <p className="field-error">
          {conflict.saved.remeasureAfterMonths === null
            ? i18n.t("Someone took the interval out meanwhile. Save again to put yours.")
            : i18n.t("Someone saved {months} months meanwhile. Save again to put yours.", {
                months: conflict.saved.remeasureAfterMonths,
              })}
        </p>
      )}
      <FormProblem error={error} />
      <FormActions>
        <SubmitButton isBusy={isSaving}>{i18n.t("Save")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
      </FormActions>
    </Form>
  );
}
