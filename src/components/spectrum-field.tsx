import { useLingui } from "@lingui/react";
import { type ReactNode, useId, useRef, useState } from "react";
import type { FieldPath, FieldValues, PathValue, UseFormReturn } from "react-hook-form";
import {
  A_WEIGHTING_DB,
  lcMinusLaOfSpectrumDb,
  weightedSumDb,
} from "../../shared/acoustics/protection/octave-band";
import { OCTAVE_BANDS_HZ, type OctaveBandValues } from "../../shared/acoustics/types";
import { formatLevel, formatLevelChange } from "../../shared/format/level";
import { useLocale } from "../lib/i18n";
import { BandFields } from "./band-fields";
import { readBands } from "./read-bands";
import { Status } from "./status";

/** Further apart than that, a level and its spectrum are asked about, dB. */
const ASKED_FROM_DB = 1;
/** No file of eight levels is larger, bytes. */
const MOST_BYTES = 1_000_000;

const isSpectrum = (bands: unknown): bands is OctaveBandValues =>
  Array.isArray(bands) &&
  bands.length === OCTAVE_BANDS_HZ.length &&
  bands.every((level, band) => typeof level === "number" || (band === 0 && level === null));

/** What a spectrum adds up to, and by how much that misses the level that stands beside it. */
export function checkSpectrum(bands: unknown, levelDb: unknown) {
  if (!isSpectrum(bands)) return null;
  const sumDb = weightedSumDb(bands, A_WEIGHTING_DB);
  const offDb = typeof levelDb === "number" ? sumDb - levelDb : null;
  return {
    sumDb,
    lcMinusLaDb: lcMinusLaOfSpectrumDb(bands),
    offDb,
    isAsked: offDb !== null && Math.abs(offDb) > ASKED_FROM_DB,
  };
}

export interface SpectrumCheck {
  readonly found: ReturnType<typeof checkSpectrum>;
  readonly isAccepted: boolean;
  accept(isAccepted: boolean): void;
  readonly box: React.RefObject<HTMLInputElement | null>;
  /** Whether the form may be sent; else the question gets the focus. */
  isSettled(): boolean;
}

/** Holds a form's spectrum to its level; what misses it is sent only once somebody has said that it is meant. */
export function useSpectrumCheck(bands: unknown, levelDb: unknown): SpectrumCheck {
  const box = useRef<HTMLInputElement>(null);
  const found = checkSpectrum(bands, levelDb);
  // An answer is to these figures; others are asked about anew.
  const figures = JSON.stringify([bands, levelDb]);
  const [answered, setAnswered] = useState<string | null>(null);
  const isAccepted = answered === figures;
  return {
    found,
    isAccepted,
    accept: (isYes) => setAnswered(isYes ? figures : null),
    box,
    isSettled() {
      if (!found?.isAsked || isAccepted) return true;
      const folded = box.current?.closest("details");
      if (folded) folded.open = true;
      box.current?.focus();
      return false;
    },
  };
}

/** Octave levels, typed, pasted or from a file, with what they add up to. */
export function SpectrumField<Values extends FieldValues, Output>({
  form,
  name,
  label,
  note,
  check,
}: {
  form: UseFormReturn<Values, unknown, Output>;
  name: FieldPath<Values>;
  label: string;
  note?: ReactNode;
  check: SpectrumCheck;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const id = useId();
  const [fileWord, setFileWord] = useState<string | null>(null);

  async function take(file: File | undefined) {
    if (!file) return;
    const text = file.size > MOST_BYTES ? "" : await file.text();
    const read = readBands(text.replace(/^\ufeff/, ""), locale);
    const values = [...(read?.from === 1 ? [null] : []), ...(read?.values ?? [])];
    const isWhole = isSpectrum(values);
    setFileWord(
      isWhole
        ? i18n.t("Read from {file}.", { file: file.name })
        : i18n.t("{file} holds no levels of eight octave bands.", { file: file.name }),
    );
    if (isWhole)
      form.setValue(name, values as PathValue<Values, FieldPath<Values>>, {
        shouldDirty: true,
        shouldValidate: form.formState.isSubmitted,
      });
  }

  const { found } = check;
  return (
    <div className="spectrum-field">
      <BandFields
        form={form}
        name={name}
        label={label}
        rows={[{ label: i18n.t("Octave band level") }]}
        note={note}
      />
      <div className="spectrum-sums">
        <span className="spectrum-file">
          <label className="link" htmlFor={`${id}-file`}>
            {i18n.t("From a file")}
          </label>
          <input
            id={`${id}-file`}
            className="sr-only"
            type="file"
            accept=".csv,.txt,.tsv,text/plain,text/csv"
            onChange={(event) => {
              void take(event.target.files?.[0]);
              event.target.value = "";
            }}
          />
        </span>
        <Status>
          {found
            ? i18n.t("A-weighted sum {sum} dB(A), LC − LA {difference} dB.", {
                sum: formatLevel(found.sumDb, locale),
                difference: formatLevel(found.lcMinusLaDb, locale),
              })
            : fileWord}
          {found && fileWord && ` ${fileWord}`}
        </Status>
        {found?.isAsked && (
          <label className="choice spectrum-question">
            <input
              ref={check.box}
              type="checkbox"
              checked={check.isAccepted}
              onChange={(event) => check.accept(event.target.checked)}
            />
            <span>
              {i18n.t(
                "The sum lies {difference} dB away from the level. They belong together all the same.",
                { difference: formatLevelChange(found.offDb, locale) },
              )}
            </span>
          </label>
        )}
      </div>
    </div>
  );
}
