import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { useController } from "react-hook-form";
import type { RuleSetVersion } from "../../../shared/acoustics/types";
import { formatDate } from "../../../shared/format/date";
import { SiteSettingsInput, SiteView } from "../../../shared/schemas/site";
import {
  CheckField,
  DateField,
  Field,
  Form,
  NumberField,
  SelectField,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { LookActions, ReviewedChange, useReviewedChange } from "../../components/reviewed-change";
import { useLocale } from "../../lib/i18n";
import { ruleQueries } from "./queries";
import { ruleSetTitle } from "./settings-table";

type Form_ = ReturnType<typeof useSchemaForm<typeof SiteSettingsInput>>;

function ComparisonField({ form, ruleSets }: { form: Form_; ruleSets: readonly RuleSetVersion[] }) {
  const { i18n } = useLingui();
  const { field, fieldState } = useController({
    control: form.control,
    name: "comparisonRuleSets",
  });
  const governing = form.watch("governingRuleSet");
  const chosen = field.value ?? [];
  const error = fieldState.error as { message?: string } | { message?: string }[] | undefined;
  const message = Array.isArray(error) ? error.find(Boolean)?.message : error?.message;
  return (
    <Field label={i18n.t("For comparison")} isGroup isOptional error={message}>
      {() =>
        ruleSets
          .filter(({ key }) => key !== governing)
          .map(({ key, title }) => (
            <label key={key} className="choice">
              <input
                type="checkbox"
                checked={chosen.includes(key)}
                onChange={(event) =>
                  field.onChange(
                    event.target.checked
                      ? [...chosen, key]
                      : chosen.filter((other) => other !== key),
                  )
                }
              />
              <span>{i18n._(title)}</span>
            </label>
          ))
      }
    </Field>
  );
}

/** New rules for a site from a date on: filled in, looked at with who changes verdict, then saved. */
export function SettingsForm({
  site,
  ruleSets,
  today,
  onLeave,
  onSaved,
}: {
  site: SiteView;
  /** One version of each, for the choice. */
  ruleSets: readonly RuleSetVersion[];
  today: string;
  onLeave: () => void;
  onSaved: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const { governingRuleSet, comparisonRuleSets, wearFromDb, creditsActivePart, usesUncertainty } =
    site.settings;
  const form = useSchemaForm(SiteSettingsInput, {
    defaultValues: {
      governingRuleSet,
      comparisonRuleSets,
      wearFromDb,
      creditsActivePart,
      usesUncertainty,
      effectiveFrom: today,
      reason: "",
    },
  });
  const change = useReviewedChange<SiteSettingsInput, SiteView>({
    path: `/sites/${site.id}/settings`,
    schema: SiteView,
    onError: showIssuesOn(form, i18n),
    onSaved: (view) => {
      client.setQueryData(ruleQueries.site(view.id).queryKey, view);
      void client.invalidateQueries({ queryKey: ruleQueries.sites });
      onSaved();
    },
  });
  return (
    <ReviewedChange
      change={change}
      what={(body) =>
        i18n.t("{ruleSet} governs {site} from {date} on.", {
          ruleSet: ruleSetTitle(i18n, ruleSets, body.governingRuleSet),
          site: site.name,
          date: formatDate(body.effectiveFrom, locale),
        })
      }
    >
      <Form
        aria-label={i18n.t("New rules")}
        onSubmit={form.handleSubmit((body) => {
          const chosen = {
            ...body,
            comparisonRuleSets: body.comparisonRuleSets.filter(
              (key) => key !== body.governingRuleSet,
            ),
          };
          const { reason: _, ...facts } = chosen;
          change.look(chosen, facts);
        })}
      >
        <SelectField
          form={form}
          name="governingRuleSet"
          label={i18n.t("Governs")}
          choices={ruleSets.map(({ key, title }) => ({ value: key, label: i18n._(title) }))}
          note={i18n.t("Findings come from the governing rule set only.")}
        />
        <ComparisonField form={form} ruleSets={ruleSets} />
        <NumberField
          form={form}
          name="wearFromDb"
          label={i18n.t("Worn from")}
          unit="dB(A)"
          note={i18n.t("A protector counts as worn in tasks of this level or more, and in a zone.")}
        />
        <CheckField
          form={form}
          name="usesUncertainty"
          label={i18n.t("Uncertainty")}
          text={i18n.t("Verdicts take the uncertainty of ISO 9612 into account")}
        />
        <CheckField
          form={form}
          name="creditsActivePart"
          label={i18n.t("Active part")}
          text={i18n.t("It counts for limits, for workers with a passed active check")}
        />
        <DateField
          form={form}
          name="effectiveFrom"
          label={i18n.t("From")}
          note={i18n.t("Days from this date on are judged anew. Both judgements are kept.")}
        />
        <TextAreaField form={form} name="reason" label={i18n.t("Reason")} rows={2} />
        <LookActions preview={change.preview} onLeave={onLeave} />
      </Form>
    </ReviewedChange>
  );
}
