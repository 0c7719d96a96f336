import { useLingui } from "@lingui/react";
import type { UseFormReturn } from "react-hook-form";
import type { z } from "zod";
import type { NewProtectorInput } from "../../../shared/schemas/protector";
import { BandFields } from "../../components/band-fields";
import { DateField, Field, NumberField, TextAreaField } from "../../components/form";
import { NumberInput } from "../../components/number-input";

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

/** The single numbers of the label, side by side as a label has them. */
function LabelledNumbers({ form }: { form: ProtectorForm }) {
  const { i18n } = useLingui();
  const numbers = [
    { key: "usRatingDb", label: i18n.t("US number") },
    { key: "snrDb", label: i18n.t("SNR") },
    { key: "hDb", label: i18n.t("H") },
    { key: "mDb", label: i18n.t("M") },
    { key: "lDb", label: i18n.t("L") },
    { key: "slc80Db", label: i18n.t("SLC80") },
  ] as const;
  const messageOf = (key: (typeof numbers)[number]["key"]) =>
    form.formState.errors.data?.[key]?.message;
  const messages = numbers.flatMap(({ key, label }) => {
    const message = messageOf(key);
    return message ? [`${label}: ${message}`] : [];
  });
  return (
    <Field
      label={i18n.t("On the label, dB")}
      isGroup
      isOptional
      error={messages.length > 0 ? messages.join(" ") : undefined}
    >
      {(wires) => (
        <div className="band-cells is-label">
          {numbers.map(({ key, label }) => (
            <div key={key}>
              <span aria-hidden="true">{label}</span>
              <NumberInput
                className="input band-input"
                aria-label={`${label}, dB`}
                aria-describedby={wires["aria-describedby"]}
                aria-invalid={messageOf(key) ? true : undefined}
                value={form.watch(`data.${key}`)}
                onValue={(value) =>
                  form.setValue(`data.${key}`, value as number | null, {
                    shouldDirty: true,
                    shouldValidate: form.formState.isSubmitted,
                  })
                }
              />
            </div>
          ))}
        </div>
      )}
    </Field>
  );
}

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
      <LabelledNumbers form={form} />
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
