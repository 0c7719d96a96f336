import type { I18n } from "@lingui/core";
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
import { linesOfSubjects, OTHER_63_HZ, readSubjects } from "./read-subjects";
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
  const bands: unknown = form.watch("data.bands");
  /** What was taken over without being asked for: only that is taken anew. */
  const [taken, setTaken] = useState<string | null>(null);
  const isTaken = taken !== null && taken === JSON.stringify(bands);
  const isWritten = typed !== null && JSON.stringify(typed.value) === JSON.stringify(stored);
  const errors: unknown = get(form.formState.errors, "data.subjectsDb");
  const lines = linesOfSubjects(isWritten ? typed.text : written, locale);
  const whole = typedFacts({ subjectsDb: stored }).subjectsDb ?? null;
  const wholeCount = (stored ?? []).filter(isWhole).length;

  const take = (subjects: readonly OctaveBandValues[]) => {
    const found = bandsOfSubjects(subjects);
    setTaken(JSON.stringify(found));
    form.setValue("data.bands", found as never, { shouldDirty: true, shouldValidate: true });
  };
  const put = (text: string) => {
    const read = readSubjects(text, locale);
    const value = read.length === 0 ? null : read;
    setTyped({ text, value });
    form.setValue("data.subjectsDb", value as never, {
      shouldDirty: true,
      shouldValidate: form.formState.isSubmitted,
    });
    const subjects = typedFacts({ subjectsDb: value }).subjectsDb ?? null;
    if (subjects && (isTaken || isEmpty(form.getValues("data.bands")))) take(subjects);
  };

  return (
    <Field
      label={i18n.t("One subject a line, dB")}
      isOptional
      note={i18n.t(
        "Pasted from a spreadsheet: eight bands from 63 Hz, or seven from 125 Hz; a head of frequencies and a first column of subjects are left out.",
      )}
      error={faultOf(i18n, errors, stored ?? [], (subject) => lines[subject] ?? subject + 1)}
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
              [
                i18n.t("{count, plural, one {# subject} other {# subjects}}.", {
                  count: wholeCount,
                }),
                stored.length > wholeCount &&
                  i18n.t(
                    "{count, plural, one {# line is not whole and does not count.} other {# lines are not whole and do not count.}}",
                    { count: stored.length - wholeCount },
                  ),
                isTaken && i18n.t("Mean and deviation by band above are taken from them."),
              ]
                .filter(Boolean)
                .join(" ")}
          </Status>
          {whole && !isTaken && (
            <TextButton onClick={() => take(whole)}>
              {i18n.t("Take mean and deviation by band from them")}
            </TextButton>
          )}
        </div>
      )}
    </Field>
  );
}

const isEmpty = (bands: unknown): boolean =>
  [get(bands, "meanDb"), get(bands, "sdDb")].every(
    (row: unknown) => !Array.isArray(row) || row.every((value) => value === null),
  );

/** A line with a number in every band, 63 Hz or not. */
const isWhole = (subject: readonly Typed[]): boolean =>
  subject.every((value, band) => typeof value === "number" || (band === 0 && value === null));

/** More faults than these are no longer read, dozens come of one wrong paste. */
const MOST_FAULTS = 6;

/** The faults together, each with the line on which it stands. */
function faultOf(
  i18n: I18n,
  errors: unknown,
  stored: Subjects,
  lineOf: (subject: number) => number,
): string | undefined {
  const own = messageOf(errors);
  if (own !== null) return own;
  // The form's errors are members by index, of those that have one.
  const found = Object.entries((errors ?? {}) as Record<string, unknown>).flatMap(
    ([index, ofLine]) => faultsOfLine(i18n, ofLine, stored[Number(index)] ?? [], lineOf(+index)),
  );
  if (found.length === 0) return undefined;
  return [...found.slice(0, MOST_FAULTS), ...(found.length > MOST_FAULTS ? ["…"] : [])].join(" ");
}

function faultsOfLine(
  i18n: I18n,
  errors: unknown,
  values: readonly Typed[],
  line: number,
): string[] {
  const ofLine = messageOf(errors);
  if (ofLine !== null) return [i18n.t("Line {line}: {message}", { line, message: ofLine })];
  const missingHz: number[] = [];
  const found: string[] = [];
  for (const [band, hz] of OCTAVE_BANDS_HZ.entries()) {
    const fault: unknown = get(errors, `${band}`);
    const message = messageOf(fault);
    const value = values[band];
    if (message === null) continue;
    if (value instanceof Unreadable && value.code === OTHER_63_HZ)
      found.push(i18n.t("Line {line}: {message}", { line, message }));
    else if (value === null) missingHz.push(hz);
    else if (value instanceof Unreadable)
      found.push(
        i18n.t("Line {line}, {hz} Hz, “{typed}”: {message}", {
          line,
          hz,
          typed: value.text,
          message,
        }),
      );
    else found.push(i18n.t("Line {line}, {hz} Hz: {message}", { line, hz, message }));
  }
  if (missingHz.length > 0)
    found.push(
      i18n.t("{row}: {bands} Hz missing.", {
        row: i18n.t("Line {line}", { line }),
        bands: missingHz.join(", "),
      }),
    );
  return found;
}

function messageOf(error: unknown): string | null {
  const message: unknown = get(error, "message");
  return typeof message === "string" ? message : null;
}
