import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import type { UseFormReturn } from "react-hook-form";
import { useWatch } from "react-hook-form";
import type { z } from "zod";
import { LOCALE_NAMES, localeOf } from "../../../shared/i18n/index";
import { NewSiteInput, SiteInput, SiteView } from "../../../shared/schemas/site";
import { CheckField, DateField, NumberField, SelectField } from "../../components/form";
import { RecordForm } from "../../components/record-form";
import { siteQueries } from "./queries";
import { ruleSetKeys } from "./rule-set-keys";
import { RuleSetsField } from "./rule-sets-field";
import { SiteFields } from "./site-fields";

const toSite = ({ name, timeZone, language, noticeDelayMin }: SiteView): SiteInput => ({
  name,
  timeZone,
  language,
  noticeDelayMin,
});

interface FormProps {
  onSaved: () => void;
  onLeave: () => void;
}

function useSaved(onSaved: () => void) {
  const client = useQueryClient();
  return () => {
    void client.invalidateQueries({ queryKey: siteQueries.all });
    // Names and zones of the sites also come with the session.
    void client.invalidateQueries({ queryKey: ["session"] });
    onSaved();
  };
}

export function SiteForm({ site, onSaved, onLeave }: FormProps & { site: SiteView }) {
  const { i18n } = useLingui();
  const saved = useSaved(onSaved);
  return (
    <RecordForm
      name={i18n.t("Change this site")}
      schema={SiteInput}
      viewSchema={SiteView}
      path="/sites"
      record={site}
      defaultValues={toSite(site)}
      toBody={toSite}
      fields={[
        { key: "name", label: i18n.t("Name"), show: ({ name }) => name },
        { key: "timeZone", label: i18n.t("Time zone"), show: ({ timeZone }) => timeZone },
        {
          key: "language",
          label: i18n.t("Language"),
          show: ({ language }) => LOCALE_NAMES[language],
        },
        {
          key: "noticeDelayMin",
          label: i18n.t("Before notices go, min"),
          show: ({ noticeDelayMin }) => noticeDelayMin,
        },
      ]}
      conflictTitle={i18n.t("Someone saved this site before you")}
      onSaved={saved}
      onLeave={onLeave}
    >
      {(form) => <SiteFields form={form} />}
    </RecordForm>
  );
}

type NewForm = UseFormReturn<z.input<typeof NewSiteInput>, unknown, z.output<typeof NewSiteInput>>;

/** A new site comes with its first rules: no day can be judged without. */
export function NewSiteForm({ today, onSaved, onLeave }: FormProps & { today: string }) {
  const { i18n } = useLingui();
  const saved = useSaved(onSaved);
  const [first] = ruleSetKeys;
  return (
    <RecordForm
      name={i18n.t("New site")}
      schema={NewSiteInput}
      viewSchema={SiteView}
      path="/sites"
      record={null}
      defaultValues={{
        name: "",
        timeZone: Intl.DateTimeFormat().resolvedOptions().timeZone,
        language: localeOf(i18n),
        noticeDelayMin: 15,
        settings: {
          effectiveFrom: today,
          governingRuleSet: first?.key ?? "",
          comparisonRuleSets: [],
          wearFromDb: 85,
          creditsActivePart: false,
          usesUncertainty: false,
        },
      }}
      toBody={({ settings, ...site }) => ({ ...toSite({ ...site, settings }), settings })}
      fields={[]}
      conflictTitle={i18n.t("Someone saved this site before you")}
      onSaved={saved}
      onLeave={onLeave}
    >
      {(form) => (
        <>
          <SiteFields form={form} />
          <h2 className="form-part">{i18n.t("First rules")}</h2>
          <FirstRules form={form} />
        </>
      )}
    </RecordForm>
  );
}

function FirstRules({ form }: { form: NewForm }) {
  const { i18n } = useLingui();
  const governing = useWatch({ control: form.control, name: "settings.governingRuleSet" });
  return (
    <>
      <DateField form={form} name="settings.effectiveFrom" label={i18n.t("In force from")} />
      <SelectField
        form={form}
        name="settings.governingRuleSet"
        label={i18n.t("Governing rules")}
        choices={ruleSetKeys.map(({ key, title }) => ({ value: key, label: i18n._(title) }))}
        note={ruleSetKeys.find(({ key }) => key === governing)?.citation}
      />
      <RuleSetsField form={form} name="settings.comparisonRuleSets" governing={governing} />
      <NumberField
        form={form}
        name="settings.wearFromDb"
        label={i18n.t("Worn from")}
        unit="dB"
        note={i18n.t("A protector counts as worn in tasks of this level or more.")}
      />
      <CheckField
        form={form}
        name="settings.creditsActivePart"
        label={i18n.t("Active part")}
        text={i18n.t("Counts for a limit where the worker has passed the check")}
      />
      <CheckField
        form={form}
        name="settings.usesUncertainty"
        label={i18n.t("Uncertainty")}
        text={i18n.t("Counts in verdicts: there is a Can’t tell yet")}
      />
    </>
  );
}
