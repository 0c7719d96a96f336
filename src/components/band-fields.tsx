import { useLingui } from "@lingui/react";
import { type ReactNode, useState } from "react";
import {
  type FieldPath,
  type FieldValues,
  get,
  type UseFormReturn,
  useController,
} from "react-hook-form";
import { OCTAVE_BANDS_HZ } from "../../shared/acoustics/types";
import { useLocale } from "../lib/i18n";
import { bandLabel } from "./band-picture";
import { readWords, refusalWords } from "./band-words";
import { Field } from "./form";
import { NumberInput, type Typed } from "./number-input";
import { readBands, type ThirdOctaves } from "./read-bands";
import { Status } from "./status";

export interface BandRow {
  /** Member of the value that holds this row; without it the value is the row itself. */
  readonly key?: string;
  readonly label: string;
}

const emptyRow = (count: number): Typed[] => Array.from({ length: count }, () => null);

interface Fault {
  readonly band: number;
  /** Nothing where the band is only missing. */
  readonly message: string | null;
}

function faultsOf(errors: unknown, path: string, bandsHz: readonly number[]): Fault[] {
  return bandsHz.flatMap((hz, band) => {
    const found = get(errors, `${path}.${band}`) as { type?: string; message?: string } | undefined;
    if (!found?.message) return [];
    return [{ band, message: found.type === "invalid_type" ? null : `${hz} Hz: ${found.message}` }];
  });
}

/**
 * One value for each octave band, or each of other test frequencies, in one or more rows; all values can be pasted into
 * any cell. All empty: not stated (null), where the field is optional.
 */
export function BandFields<Values extends FieldValues, Output>({
  form,
  name,
  rows,
  label,
  note,
  isOptional = true,
  bandsHz = OCTAVE_BANDS_HZ,
  thirds,
}: {
  form: UseFormReturn<Values, unknown, Output>;
  name: FieldPath<Values>;
  rows: readonly BandRow[];
  label: string;
  note?: ReactNode;
  isOptional?: boolean;
  bandsHz?: readonly number[];
  /** What becomes of third-octaves that are pasted. */
  thirds: ThirdOctaves;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { field } = useController({ control: form.control, name });
  const stored = field.value as unknown;
  /** What the last paste left out, or why nothing was taken of it. */
  const [pasted, setPasted] = useState<{ word: string | null; isRefused: boolean } | null>(null);
  const rowValues = (row: BandRow): Typed[] => {
    const found: unknown = row.key === undefined ? stored : get(stored, row.key);
    return Array.isArray(found) ? (found as Typed[]) : emptyRow(bandsHz.length);
  };

  function put(changed: BandRow, values: Typed[]) {
    const all = rows.map((row) => (row === changed ? values : rowValues(row)));
    const isEmpty = all.every((row) => row.every((value) => value === null));
    if (isEmpty && isOptional) field.onChange(null);
    else if (changed.key === undefined) field.onChange(values);
    else field.onChange(Object.fromEntries(rows.map((row, index) => [row.key, all[index]])));
  }

  function paste(row: BandRow, band: number, text: string): boolean {
    const found = readBands(text, locale, { at: band, bandsHz, thirds });
    if (!found) return false;
    const { read, refusal } = found;
    setPasted(
      refusal
        ? { word: refusalWords(i18n, refusal), isRefused: true }
        : { word: readWords(i18n, read), isRefused: false },
    );
    if (!read) return true;
    const values = [...rowValues(row)];
    values.splice(read.from, read.values.length, ...read.values);
    put(row, values);
    return true;
  }

  const { errors } = form.formState;
  const faults = rows.map((row) =>
    faultsOf(errors, row.key === undefined ? name : `${name}.${row.key}`, bandsHz),
  );
  const faultTexts = rows.flatMap((row, index) => {
    const found = faults[index] ?? [];
    const missing = found.filter(({ message }) => message === null);
    return [
      ...(missing.length > 0
        ? [
            i18n.t("{row}: {bands} Hz missing.", {
              row: row.label,
              bands: missing.map(({ band }) => bandsHz[band]).join(", "),
            }),
          ]
        : []),
      ...found.flatMap(({ message }) => (message === null ? [] : [message])),
    ];
  });
  const own = get(errors, name) as { message?: unknown } | undefined;
  const rowErrors = rows.map((row) =>
    row.key === undefined
      ? undefined
      : (get(errors, `${name}.${row.key}`) as { message?: unknown }),
  );
  const messages = [
    ...(pasted?.isRefused && pasted.word !== null ? [pasted.word] : []),
    ...[own, ...rowErrors].flatMap((error) =>
      typeof error?.message === "string" ? [error.message] : [],
    ),
    ...faultTexts,
  ];

  return (
    <Field
      label={label}
      note={note}
      isOptional={isOptional}
      isGroup
      error={messages.length > 0 ? messages.join(" ") : undefined}
    >
      {(wires) => (
        <div className="band-fields">
          {rows.map((row, rowIndex) => (
            <fieldset key={row.key ?? "row"}>
              <legend className={rows.length === 1 ? "sr-only" : undefined}>{row.label}</legend>
              <div className={`band-cells${bandsHz.length === 9 ? " is-nine" : ""}`}>
                {bandsHz.map((hz, band) => (
                  <div key={hz}>
                    <span aria-hidden="true">{bandLabel(hz)}</span>
                    <NumberInput
                      className="input band-input"
                      aria-label={i18n.t("{row}, {hz} Hz", { row: row.label, hz })}
                      aria-invalid={
                        rowErrors[rowIndex]?.message !== undefined ||
                        faults[rowIndex]?.some((fault) => fault.band === band) ||
                        undefined
                      }
                      aria-describedby={wires["aria-describedby"]}
                      value={rowValues(row)[band]}
                      onValue={(value) => {
                        setPasted(null);
                        put(
                          row,
                          rowValues(row).map((before, at) => (at === band ? value : before)),
                        );
                      }}
                      onPaste={(event) => {
                        if (paste(row, band, event.clipboardData.getData("text")))
                          event.preventDefault();
                      }}
                      onBlur={field.onBlur}
                    />
                  </div>
                ))}
              </div>
            </fieldset>
          ))}
          <Status>{pasted?.isRefused ? null : pasted?.word}</Status>
        </div>
      )}
    </Field>
  );
}
