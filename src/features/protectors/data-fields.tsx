import { useLingui } from "@lingui/react";
import type { UseFormReturn } from "react-hook-form";
import type { z } from "zod";
import type { NewProtectorInput } from "../../../shared/schemas/protector";
import { BandFields } from "../../components/band-fields";
import { DateField, Field, NumberField, TextAreaField } from "../../components/form";

export type ProtectorForm = UseFormReturn<
  z.input<typeof NewProtectorInput>,
  unknown,
  z.output<typeof NewProtectorInput>
>;

const NO_ACTIVE = {
  attenuationDb: null,
  delayS: null,
  gain: null,
  maximumDb: null,
  bandwidthHz: null,
  saturatesAboveDb: null,
  batteryMin: null,
};

/** What certificate and test reports say of a model, from a date on. */
export function ProtectorDataFields({
  form,
  needsReason,
}: {
  form: ProtectorForm;
  needsReason: boolean;
}) {
  const { i18n } = useLingui();
  const active = form.watch("data.active");
  return (
    <>
      <NumberField
        form={form}
        name="data.usRatingDb"
        label={i18n.t("US single number")}
        unit="dB"
        isOptional
      />
      <NumberField
        form={form}
        name="data.snrDb"
        label={i18n.t("SNR")}
        unit="dB"
        isOptional
        note={i18n.t("Never below the L of the same label.")}
      />
      <NumberField form={form} name="data.hDb" label={i18n.t("H")} unit="dB" isOptional />
      <NumberField form={form} name="data.mDb" label={i18n.t("M")} unit="dB" isOptional />
      <NumberField form={form} name="data.lDb" label={i18n.t("L")} unit="dB" isOptional />
      <NumberField form={form} name="data.slc80Db" label={i18n.t("SLC80")} unit="dB" isOptional />
      <BandFields
        form={form}
        name="data.bands"
        label={i18n.t("By octave band, dB")}
        rows={[
          { key: "meanDb", label: i18n.t("Mean attenuation") },
          { key: "sdDb", label: i18n.t("Standard deviation") },
        ]}
        note={i18n.t(
          "63 Hz may stay empty, the others not. Eight values can be pasted into any cell.",
        )}
      />
      <Field label={i18n.t("Active part")} error={undefined} isGroup>
        {() => (
          <label className="choice">
            <input
              type="checkbox"
              checked={active !== null && active !== undefined}
              onChange={(event) =>
                form.setValue("data.active", event.target.checked ? NO_ACTIVE : null, {
                  shouldDirty: true,
                })
              }
            />
            <span>{i18n.t("It cancels noise electronically")}</span>
          </label>
        )}
      </Field>
      {active && (
        <>
          <BandFields
            form={form}
            name="data.active.attenuationDb"
            label={i18n.t("Active attenuation, dB")}
            rows={[{ label: i18n.t("Active attenuation") }]}
            note={i18n.t(
              "From its own test report; negative where it adds noise. Without a report: delay and gain.",
            )}
          />
          <NumberField
            form={form}
            name="data.active.delayS"
            label={i18n.t("Delay")}
            unit="s"
            isOptional
            note={i18n.t("Of the canceller; 50 µs is 0.00005.")}
          />
          <NumberField
            form={form}
            name="data.active.gain"
            label={i18n.t("Gain")}
            isOptional
            note={i18n.t("1 is perfect.")}
          />
          <NumberField
            form={form}
            name="data.active.maximumDb"
            label={i18n.t("At most")}
            unit="dB"
            isOptional
          />
          <NumberField
            form={form}
            name="data.active.bandwidthHz"
            label={i18n.t("Works up to")}
            unit="Hz"
            isOptional
          />
          <NumberField
            form={form}
            name="data.active.saturatesAboveDb"
            label={i18n.t("Saturates above")}
            unit="dB(A)"
            isOptional
          />
          <NumberField
            form={form}
            name="data.active.batteryMin"
            label={i18n.t("Battery lasts")}
            unit="min"
            isOptional
          />
        </>
      )}
      <DateField
        form={form}
        name="data.effectiveFrom"
        label={i18n.t("Holds from")}
        note={
          needsReason
            ? i18n.t("It may lie back: who wore it since then is judged again.")
            : undefined
        }
      />
      {needsReason && (
        <TextAreaField form={form} name="data.reason" label={i18n.t("Reason")} rows={2} />
      )}
    </>
  );
}
