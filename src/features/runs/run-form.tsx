import { useLingui } from "@lingui/react";
import { type UseFormReturn, useController, useFieldArray } from "react-hook-form";
import { formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import type { InstrumentView } from "../../../shared/schemas/run";
import { Button } from "../../components/button";
import { ComboboxField } from "../../components/combobox-field";
import {
  DateField,
  DurationField,
  NumberField,
  RadioGroup,
  SelectField,
  TextAreaField,
} from "../../components/form";
import { TextButton } from "../../components/link";
import {
  COMMON_SETTINGS,
  SettingsInput,
  type TypedSettings,
} from "../../components/meter-settings";
import { useLocale } from "../../lib/i18n";
import { searchWorkers } from "../../lib/references";
import { driftDb, emptyReading, isDriftTooLarge, type RunFormValues } from "./run-fields";

type RunForm = UseFormReturn<RunFormValues, unknown, RunFormValues>;

/** Instrument, worker and day: what a run is, and is never corrected into another. */
export function RunHeadFields({
  form,
  instruments,
}: {
  form: RunForm;
  instruments: readonly InstrumentView[];
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const usable = instruments.filter(({ isArchived, kind }) => !isArchived && kind !== "calibrator");
  const chosen = usable.find(({ id }) => id === form.watch("instrumentId"));
  const date = form.watch("date");
  const isOutOfDate = isCalibrationOut(chosen, date);
  return (
    <>
      <SelectField
        form={form}
        name="instrumentId"
        label={i18n.t("Instrument")}
        emptyLabel={i18n.t("Choose one")}
        choices={usable.map(({ id, name, serialNumber }) => ({
          value: id,
          label: `${name}, ${serialNumber}`,
        }))}
        note={
          chosen?.calibrationDueOn
            ? isOutOfDate
              ? i18n.t("Its laboratory calibration ran out on {date}.", {
                  date: formatShortDate(chosen.calibrationDueOn, locale),
                })
              : i18n.t("Calibration due {date}.", {
                  date: formatShortDate(chosen.calibrationDueOn, locale),
                })
            : undefined
        }
      />
      <ComboboxField form={form} name="workerId" label={i18n.t("Worn by")} search={searchWorkers} />
      <DateField
        form={form}
        name="date"
        label={i18n.t("Day")}
        note={i18n.t("On which the shift began.")}
      />
    </>
  );
}

export const isCalibrationOut = (
  instrument: Pick<InstrumentView, "calibrationDueOn"> | undefined,
  date: unknown,
): boolean =>
  instrument?.calibrationDueOn != null &&
  typeof date === "string" &&
  instrument.calibrationDueOn < date;

/** What the instrument said, and under which conditions. */
export function RunFactsFields({
  form,
  presets,
  needsKeptReason,
}: {
  form: RunForm;
  presets: readonly TypedSettings[];
  needsKeptReason: boolean;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const drift = driftDb(form.watch("checkBeforeDb"), form.watch("checkAfterDb"));
  const isTooLarge = isDriftTooLarge(drift);
  return (
    <>
      <DurationField
        form={form}
        name="durationMin"
        label={i18n.t("Run time")}
        unit="min"
        note={i18n.t("450, 7:30 or 7.5h.")}
      />
      <RadioGroup
        form={form}
        name="covers"
        label={i18n.t("It covers")}
        choices={[
          { value: "shift", label: i18n.t("the shift") },
          {
            value: "projected",
            label: i18n.t("a part; the rest was like it"),
            note: i18n.t("The result is marked projected."),
          },
          { value: "part", label: i18n.t("a part; only evidence") },
        ]}
      />
      <NumberField
        form={form}
        name="checkBeforeDb"
        label={i18n.t("Field check before")}
        unit="dB"
        isOptional
      />
      <NumberField
        form={form}
        name="checkAfterDb"
        label={i18n.t("Field check after")}
        unit="dB"
        isOptional
        note={
          drift === null
            ? i18n.t("More than 0.5 dB apart, and the run is discarded or kept with a reason.")
            : i18n.t("{drift} dB apart.", { drift: formatLevel(drift, locale) })
        }
      />
      {(isTooLarge || needsKeptReason || form.watch("keptReason")) && (
        <TextAreaField
          form={form}
          name="keptReason"
          label={i18n.t("Why it is kept")}
          rows={2}
          note={i18n.t("Whatever uses this run then loses the standard’s name.")}
        />
      )}
      <ReadingRows form={form} presets={presets} />
      <TextAreaField
        form={form}
        name="unusual"
        label={i18n.t("Anything unusual")}
        rows={2}
        isOptional
      />
    </>
  );
}

function ReadingRows({ form, presets }: { form: RunForm; presets: readonly TypedSettings[] }) {
  const { i18n } = useLingui();
  const rows = useFieldArray({ control: form.control, name: "readings" });
  const weightings = ["A", "C", "Z"].map((value) => ({ value, label: value }));
  const add = () => {
    const used = form.getValues("readings").length;
    const settings = presets[used] ?? COMMON_SETTINGS[used % COMMON_SETTINGS.length];
    if (settings)
      rows.append(emptyReading(settings as RunFormValues["readings"][number]["settings"]));
  };
  return (
    <div className="reading-rows">
      {rows.fields.map((row, index) => (
        <fieldset key={row.id} className="reading-row">
          <legend>
            {i18n.t("Reading {number}", { number: index + 1 })}{" "}
            {rows.fields.length > 1 && (
              <TextButton onClick={() => rows.remove(index)}>
                {i18n.t("Take out")}
                <span className="sr-only">{i18n.t("reading {number}", { number: index + 1 })}</span>
              </TextButton>
            )}
          </legend>
          <ReadingSettings form={form} index={index} />
          <div className="reading-figures">
            <NumberField
              form={form}
              name={`readings.${index}.dosePct`}
              label={i18n.t("Dose")}
              unit="%"
              isOptional
            />
            <NumberField
              form={form}
              name={`readings.${index}.averageDb`}
              label={i18n.t("Average")}
              unit="dB"
              isOptional
            />
            <NumberField
              form={form}
              name={`readings.${index}.lceqDb`}
              label={i18n.t("LCeq")}
              unit="dB"
              isOptional
            />
            <NumberField
              form={form}
              name={`readings.${index}.lasMaxDb`}
              label={i18n.t("LASmax")}
              unit="dB"
              isOptional
            />
            <NumberField
              form={form}
              name={`readings.${index}.peakDb`}
              label={i18n.t("Peak")}
              unit="dB"
              isOptional
            />
            <SelectField
              form={form}
              name={`readings.${index}.peakWeighting`}
              label={i18n.t("Peak weighting")}
              choices={weightings}
            />
          </div>
        </fieldset>
      ))}
      <p>
        <Button onClick={add}>{i18n.t("Another settings row")}</Button>
      </p>
    </div>
  );
}

function ReadingSettings({ form, index }: { form: RunForm; index: number }) {
  const { i18n } = useLingui();
  const { field, fieldState } = useController({
    control: form.control,
    name: `readings.${index}.settings`,
  });
  const id = `settings-${index}`;
  return (
    <div className="field">
      <label className="field-label" htmlFor={id}>
        {i18n.t("Settings")}
      </label>
      <SettingsInput id={id} value={field.value} onValue={field.onChange} />
      {fieldState.error && <p className="field-error">{fieldState.error.message}</p>}
    </div>
  );
}
