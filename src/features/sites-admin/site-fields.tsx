import { useLingui } from "@lingui/react";
import type { FieldPath, FieldValues, UseFormReturn } from "react-hook-form";
import { LOCALE_NAMES, LOCALES, type Locale } from "../../../shared/i18n/index";
import { NumberField, SelectField, TextField } from "../../components/form";

const languages = LOCALES.map((value) => ({ value, label: LOCALE_NAMES[value] }));
const timeZones = Intl.supportedValuesOf("timeZone").map((zone) => ({ value: zone, label: zone }));

/** A zone that the browser does not list stays choosable: the server may know more. */
const withCurrent = (zone: string) =>
  timeZones.some(({ value }) => value === zone)
    ? timeZones
    : [{ value: zone, label: zone }, ...timeZones];

interface SiteValues extends FieldValues {
  name: string;
  timeZone: string;
  language?: Locale;
  noticeDelayMin?: number;
}

/** What every site has: name, time zone, language, and how long its notices wait. */
export function SiteFields<Values extends SiteValues, Output>({
  form,
}: {
  form: UseFormReturn<Values, unknown, Output>;
}) {
  const { i18n } = useLingui();
  const field = (name: keyof SiteValues & string) => ({ form, name: name as FieldPath<Values> });
  return (
    <>
      <TextField {...field("name")} label={i18n.t("Name")} />
      <SelectField
        {...field("timeZone")}
        label={i18n.t("Time zone")}
        choices={withCurrent(form.getValues("timeZone" as FieldPath<Values>))}
        note={i18n.t("Days already recorded keep the zone they were worked in.")}
      />
      <SelectField
        {...field("language")}
        label={i18n.t("Language")}
        choices={languages}
        note={i18n.t("For whoever has not chosen one.")}
      />
      <NumberField
        {...field("noticeDelayMin")}
        label={i18n.t("Before notices go")}
        unit={i18n.t("min")}
        note={i18n.t("Time in which a typing error can be caught: 0 to 1440.")}
      />
    </>
  );
}
