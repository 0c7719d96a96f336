import { useLingui } from "@lingui/react";
import { useState } from "react";
import { get } from "react-hook-form";
import { Gear } from "../../../shared/schemas/fit";
import { gearWord } from "../../../shared/words/register-words";
import { Field, NumberField } from "../../components/form";
import type { ProtectorForm } from "./data-fields";
import { hasCushions, hasTips } from "./kinds";

/** Sizes as words with commas between; what is typed stays as it is. */
function SizesField({ form }: { form: ProtectorForm }) {
  const { i18n } = useLingui();
  const sizes = form.watch("data.sizes") ?? [];
  const [typed, setTyped] = useState<{ text: string; value: string } | null>(null);
  const written = sizes.join(", ");
  const errors: unknown = get(form.formState.errors, "data.sizes");
  // Of the whole, or of one size by its index.
  const fault = [errors, ...Object.values((errors ?? {}) as Record<string, unknown>)].find(
    (one): one is { message: string } =>
      typeof (one as { message?: unknown } | undefined)?.message === "string",
  );
  return (
    <Field
      label={i18n.t("Sizes")}
      isOptional
      note={i18n.t("With commas between: S, M, L. Empty: it comes in one.")}
      error={fault?.message}
    >
      {(wires) => (
        <input
          {...wires}
          className="input"
          autoComplete="off"
          value={typed?.value === written ? typed.text : written}
          onChange={(event) => {
            const text = event.target.value;
            const value = [...new Set(text.split(/[,;]/).map((size) => size.trim()))].filter(
              (size) => size !== "",
            );
            setTyped({ text, value: value.join(", ") });
            form.setValue("data.sizes", value, {
              shouldDirty: true,
              shouldValidate: form.formState.isSubmitted,
            });
          }}
          onBlur={() => setTyped(null)}
        />
      )}
    </Field>
  );
}

/** Whether it goes with helmet, glasses, respirator: yes, no, or the certificate says nothing. */
function WorksWithField({ form }: { form: ProtectorForm }) {
  const { i18n } = useLingui();
  const worksWith = form.watch("data.worksWith") ?? {
    helmet: null,
    glasses: null,
    respirator: null,
  };
  return (
    <Field label={i18n.t("Goes with")} isGroup isOptional error={undefined}>
      {() => (
        <div className="works-with">
          {Gear.options.map((gear) => (
            <label key={gear}>
              <span>{gearWord(i18n, gear)}</span>
              <select
                className="input"
                value={String(worksWith[gear])}
                onChange={(event) =>
                  form.setValue(
                    "data.worksWith",
                    {
                      ...worksWith,
                      [gear]: event.target.value === "null" ? null : event.target.value === "true",
                    },
                    { shouldDirty: true },
                  )
                }
              >
                <option value="null">{i18n.t("not stated")}</option>
                <option value="true">{i18n.t("yes")}</option>
                <option value="false">{i18n.t("no")}</option>
              </select>
            </label>
          ))}
        </div>
      )}
    </Field>
  );
}

/** What a certificate says beside its numbers; of intervals those that the kind has. */
export function UseFields({ form }: { form: ProtectorForm }) {
  const { i18n } = useLingui();
  const [kind, cushions, tips] = form.watch([
    "kind",
    "data.cushionsEveryDays",
    "data.tipsEveryDays",
  ]);
  return (
    <>
      <SizesField form={form} />
      <WorksWithField form={form} />
      {(hasCushions(kind) || cushions != null) && (
        <NumberField
          form={form}
          name="data.cushionsEveryDays"
          label={i18n.t("New cushions every")}
          unit={i18n.t("days")}
          isOptional
        />
      )}
      {(hasTips(kind) || tips != null) && (
        <NumberField
          form={form}
          name="data.tipsEveryDays"
          label={i18n.t("New tips every")}
          unit={i18n.t("days")}
          isOptional
        />
      )}
    </>
  );
}
