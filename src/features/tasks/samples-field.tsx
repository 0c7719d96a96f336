import { useLingui } from "@lingui/react";
import { useState } from "react";
import { get, useController } from "react-hook-form";
import { formatLevel, formatLevelChange } from "../../../shared/format/level";
import { editNumber, parseNumber, roundTo } from "../../../shared/format/number";
import type { LevelDoubt } from "../../../shared/schemas/level-doubts";
import { Field, Unreadable } from "../../components/form";
import { TextButton } from "../../components/link";
import { useFiguresQuestion } from "../../components/spectrum-field";
import { useLocale } from "../../lib/i18n";
import type { TaskLevelForm } from "./level-form";

/** Holds the samples to the level; `doubt` is what they say instead. */
export function useSamplesCheck(
  doubt: LevelDoubt | undefined,
  levelDb: unknown,
  samplesDb: unknown,
) {
  return {
    doubt,
    ...useFiguresQuestion(doubt !== undefined, JSON.stringify([levelDb, samplesDb])),
  };
}

/** Samples behind a level, pasted or typed: one a line, or with blanks between. */
export function SamplesField({
  form,
  check,
}: {
  form: TaskLevelForm;
  check: ReturnType<typeof useSamplesCheck>;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { doubt } = check;
  const { field } = useController({ control: form.control, name: "samplesDb" });
  const stored = (field.value ?? []) as readonly (number | Unreadable)[];
  const [text, setText] = useState(() =>
    stored
      .map((value) => (value instanceof Unreadable ? value.text : editNumber(value, locale)))
      .join(" "),
  );
  // Of the list as a whole, or by place.
  const errors = (get(form.formState.errors, "samplesDb") ?? {}) as { message?: unknown };
  const firstFault = [errors, ...Object.values(errors)].find(
    (error): error is { message: string } =>
      typeof (error as { message?: unknown } | null)?.message === "string",
  );
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
        <>
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
          {doubt && (
            <span className="samples-question">
              <label className="choice">
                <input
                  ref={check.box}
                  type="checkbox"
                  checked={check.isAccepted}
                  onChange={(event) => check.accept(event.target.checked)}
                />
                <span>
                  {i18n.t(
                    "The level is right although the samples’ energy mean is {found} dB(A), {difference} dB from it.",
                    {
                      found: formatLevel(doubt.params.foundDb, locale),
                      difference: formatLevelChange(doubt.params.offDb, locale),
                    },
                  )}
                </span>
              </label>
              <span className="spectrum-ways">
                <TextButton
                  onClick={() =>
                    form.setValue("levelDb", roundTo(doubt.params.foundDb, 1), {
                      shouldDirty: true,
                      shouldValidate: true,
                    })
                  }
                >
                  {i18n.t("Take the samples’ level")}
                </TextButton>
                <TextButton
                  onClick={() => {
                    setText("");
                    field.onChange([]);
                  }}
                >
                  {i18n.t("Leave the samples out")}
                </TextButton>
              </span>
            </span>
          )}
        </>
      )}
    </Field>
  );
}
