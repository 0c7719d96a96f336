import { useLingui } from "@lingui/react";
import { useState } from "react";
import { get, useController } from "react-hook-form";
import { editNumber, parseNumber } from "../../../shared/format/number";
import { Field, Unreadable } from "../../components/form";
import { useLocale } from "../../lib/i18n";
import type { TaskLevelForm } from "./level-form";

/** Samples behind a level, pasted or typed: one a line, or with blanks between. */
export function SamplesField({ form }: { form: TaskLevelForm }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { field } = useController({ control: form.control, name: "samplesDb" });
  const stored = (field.value ?? []) as readonly (number | Unreadable)[];
  const [text, setText] = useState(() =>
    stored
      .map((value) => (value instanceof Unreadable ? value.text : editNumber(value, locale)))
      .join(" "),
  );
  const errors: unknown = get(form.formState.errors, "samplesDb");
  const firstFault = Array.isArray(errors)
    ? (errors.find((error) => error?.message) as { message: string } | undefined)
    : (errors as { message?: string } | undefined);
  return (
    <Field
      label={i18n.t("Samples")}
      unit="dB(A)"
      isOptional
      note={i18n.t(
        "One a line or with blanks between; they carry the sampling part of the uncertainty. {count, plural, =0 {None} one {#} other {#}} so far.",
        { count: stored.length },
      )}
      error={firstFault?.message}
    >
      {(wires) => (
        <textarea
          className="input"
          rows={2}
          {...wires}
          ref={field.ref}
          name={field.name}
          value={text}
          onBlur={field.onBlur}
          onChange={(event) => {
            setText(event.target.value);
            field.onChange(
              event.target.value
                .split(/[\s;]+/)
                .filter((part) => part !== "")
                .map((part) => {
                  const parsed = parseNumber(part, locale);
                  return parsed.kind === "ok"
                    ? parsed.value
                    : new Unreadable(
                        parsed.kind === "ambiguous" ? "ambiguous" : "not-a-number",
                        part,
                      );
                }),
            );
          }}
        />
      )}
    </Field>
  );
}
