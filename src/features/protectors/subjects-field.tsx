import { useLingui } from "@lingui/react";
import { useState } from "react";
import { get } from "react-hook-form";
import { sampleDeviation } from "../../../shared/acoustics/protection/ratings";
import { OCTAVE_BANDS_HZ, type OctaveBandValues } from "../../../shared/acoustics/types";
import { editNumber, roundTo } from "../../../shared/format/number";
import { Field, Unreadable } from "../../components/form";
import { TextButton } from "../../components/link";
import type { Typed } from "../../components/number-input";
import { Status } from "../../components/status";
import { useLocale } from "../../lib/i18n";
import type { ProtectorForm } from "./data-fields";
import { readSubjects } from "./read-subjects";
import { typedFacts } from "./typed-facts";

type Subjects = readonly (readonly Typed[])[];

/** Means and deviations by band over the subjects, dB, as a report prints them. */
function bandsOfSubjects(subjects: readonly OctaveBandValues[]) {
  const column = (band: number) => subjects.map((one) => one[band]);
  const by = (of: (values: readonly number[]) => number) =>
    OCTAVE_BANDS_HZ.map((_, band) => {
      const values = column(band).filter((value) => value !== null && value !== undefined);
      return values.length < subjects.length ? null : roundTo(of(values), 1);
    });
  return {
    meanDb: by((values) => values.reduce((sum, value) => sum + value, 0) / values.length),
    sdDb: by(sampleDeviation),
  };
}

/** Each test subject's attenuation, pasted from a spreadsheet, a line each. */
export function SubjectsField({ form }: { form: ProtectorForm }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const stored = (form.watch("data.subjectsDb") ?? null) as Subjects | null;
  const [typed, setTyped] = useState<{ text: string; value: unknown } | null>(null);
  const written = (stored ?? [])
    .map((subject) =>
      subject
        .slice(subject[0] === null ? 1 : 0)
        .map((value) => (value instanceof Unreadable ? value.text : editNumber(value, locale)))
        .join("\t"),
    )
    .join("\n");
  const isWritten = typed !== null && JSON.stringify(typed.value) === JSON.stringify(stored);
  const errors: unknown = get(form.formState.errors, "data.subjectsDb");
  const whole = typedFacts({ subjectsDb: stored }).subjectsDb ?? null;

  const put = (text: string) => {
    const read = readSubjects(text, locale);
    const value = read.length === 0 ? null : read;
    setTyped({ text, value });
    form.setValue("data.subjectsDb", value as never, {
      shouldDirty: true,
      shouldValidate: form.formState.isSubmitted,
    });
  };

  return (
    <Field
      label={i18n.t("One subject a line, dB")}
      isOptional
      note={i18n.t(
        "Pasted from a spreadsheet: eight bands from 63 Hz, or seven from 125 Hz; a head of frequencies and a first column of subjects are left out.",
      )}
      error={faultOf(errors, (subject, hz, message) =>
        i18n.t("Subject {number}, {hz} Hz: {message}", { number: subject + 1, hz, message }),
      )}
    >
      {(wires) => (
        <div className="subjects-field">
          <textarea
            className="input is-mono"
            rows={5}
            wrap="off"
            {...wires}
            value={isWritten ? typed.text : written}
            onChange={(event) => put(event.target.value)}
            onBlur={() => void form.trigger("data.subjectsDb")}
          />
          <Status>
            {stored !== null &&
              i18n.t("{count, plural, one {# subject} other {# subjects}}.", {
                count: stored.length,
              })}
          </Status>
          {whole && (
            <TextButton
              onClick={() =>
                form.setValue("data.bands", bandsOfSubjects(whole) as never, {
                  shouldDirty: true,
                  shouldValidate: true,
                })
              }
            >
              {i18n.t("Take mean and deviation by band from them")}
            </TextButton>
          )}
        </div>
      )}
    </Field>
  );
}

/** The first fault, with whose it is. */
function faultOf(
  errors: unknown,
  say: (subject: number, hz: number, message: string) => string,
): string | undefined {
  const own = (errors as { message?: unknown } | undefined)?.message;
  if (typeof own === "string") return own;
  // The form's errors are members by index, of those that have one.
  for (const [index, bands] of Object.entries((errors ?? {}) as Record<string, unknown>)) {
    const subject = Number(index);
    const ofSubject = (bands as { message?: unknown } | undefined)?.message;
    if (typeof ofSubject === "string") return say(subject, OCTAVE_BANDS_HZ[0], ofSubject);
    for (const [band, hz] of OCTAVE_BANDS_HZ.entries()) {
      const message: unknown = get(bands, `${band}.message`);
      if (typeof message === "string") return say(subject, hz, message);
    }
  }
  return undefined;
}
