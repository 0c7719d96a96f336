import { useLingui } from "@lingui/react";
import type { KeyboardEvent } from "react";
import { type FieldValues, get, useController } from "react-hook-form";
import { impossibleTrials } from "../../../shared/acoustics/protection/fit-rating";
import { issueText } from "../../../shared/problems/issue-text";
import { Field, type FieldProps } from "../../components/form";
import { NumberInput, type Typed } from "../../components/number-input";

/** More trials of one ear than anybody makes. */
export const MOST_TRIALS = 10;
const LEAST_CELLS = 4;

const isEmpty = (value: Typed | undefined) => value === null || value === undefined;

/** What stands in the cells, without the empty ones at the end. */
const withoutTail = (values: readonly Typed[]): Typed[] =>
  values.slice(0, values.findLastIndex((value) => !isEmpty(value)) + 1);

/**
 * The trials of one ear, each a donning of its own: Enter goes on to the next cell, and from an empty one to whatever
 * comes after this ear.
 */
export function TrialCells<Values extends FieldValues, Output>({
  ear,
  onLeave,
  ...props
}: Omit<FieldProps<Values, Output>, "isReadOnly"> & {
  ear: "left" | "right";
  /** Enter in an empty cell. */
  onLeave: () => void;
}) {
  const { i18n } = useLingui();
  const { form, name } = props;
  const { field } = useController({ control: form.control, name });
  const values: readonly Typed[] = Array.isArray(field.value) ? field.value : [];
  const cells = Math.min(MOST_TRIALS, Math.max(LEAST_CELLS, withoutTail(values).length + 1));
  const found = get(form.formState.errors, name) as
    | { message?: string; root?: { message?: string } }
    | undefined;
  const impossible = impossibleTrials({
    leftDb: ear === "left" ? values : [],
    rightDb: ear === "right" ? values : [],
  });
  const error =
    impossible.length > 0
      ? impossible.map(({ code, ...params }) => issueText(i18n, { code, params })).join(" ")
      : (found?.message ??
        found?.root?.message ??
        values.flatMap((_, at) => {
          const fault = get(found, `${at}.message`) as string | undefined;
          return fault ? i18n.t("Trial {trial}: {fault}", { trial: at + 1, fault }) : [];
        })[0]);
  const isInvalid = (at: number) =>
    impossible.length === 0 || impossible.some(({ trial }) => trial === at + 1);

  function onKeyDown(event: KeyboardEvent<HTMLInputElement>, at: number) {
    if (event.key !== "Enter") return;
    event.preventDefault();
    const next = event.currentTarget.parentElement?.nextElementSibling?.querySelector("input");
    if (isEmpty(values[at]) || !next) onLeave();
    else next.focus();
  }

  return (
    <Field {...props} error={error} isGroup>
      {(wires) => (
        <span className="trial-cells">
          {Array.from({ length: cells }, (_, at) => (
            // biome-ignore lint/suspicious/noArrayIndexKey: a trial is known by its place
            <span key={at}>
              <NumberInput
                ref={at === 0 ? field.ref : undefined}
                name={`${name}.${at}`}
                aria-label={i18n.t("Trial {number}", { number: at + 1 })}
                aria-invalid={isInvalid(at) ? wires["aria-invalid"] : undefined}
                value={values[at] ?? null}
                onValue={(value) => {
                  const next = [...values];
                  while (next.length < at) next.push(null);
                  next[at] = value;
                  field.onChange(withoutTail(next));
                }}
                onKeyDown={(event) => onKeyDown(event, at)}
              />
            </span>
          ))}
          <span className="unit">dB</span>
        </span>
      )}
    </Field>
  );
}
