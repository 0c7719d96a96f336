import { useLingui } from "@lingui/react";
import { type ReactNode, type RefObject, useId, useRef, useState } from "react";
import type { FieldPath, FieldValues, PathValue, UseFormReturn } from "react-hook-form";
import {
  A_WEIGHTING_DB,
  lcMinusLaOfSpectrumDb,
  weightedSumDb,
} from "../../shared/acoustics/protection/octave-band";
import { formatLevel, formatLevelChange } from "../../shared/format/level";
import { roundTo } from "../../shared/format/number";
import { findLevelDoubts, isSpectrum } from "../../shared/schemas/level-doubts";
import { useLocale } from "../lib/i18n";
import { BandFields } from "./band-fields";
import { readWords, refusalWords } from "./band-words";
import { TextButton } from "./link";
import { readBands } from "./read-bands";
import { Status } from "./status";

/** No file of eight levels is larger, bytes. */
const MOST_BYTES = 1_000_000;

/** What a spectrum adds up to, and by how much that misses the level that stands beside it. */
export function checkSpectrum(bands: unknown, levelDb: unknown) {
  if (!isSpectrum(bands)) return null;
  const sumDb = weightedSumDb(bands, A_WEIGHTING_DB);
  return {
    sumDb,
    lcMinusLaDb: lcMinusLaOfSpectrumDb(bands),
    offDb: typeof levelDb === "number" ? sumDb - levelDb : null,
    isAsked:
      findLevelDoubts({ metric: { kind: "laeq" }, levelDb, octaveBandsDb: bands }).length > 0,
  };
}

export interface SpectrumCheck {
  readonly found: ReturnType<typeof checkSpectrum>;
  readonly isAccepted: boolean;
  accept(isAccepted: boolean): void;
  readonly box: RefObject<HTMLInputElement | null>;
  /** Whether the form may be sent; else the question gets the focus. */
  isSettled(): boolean;
}

/** A question about figures that contradict each other: the form is sent only once it is answered. */
export function useFiguresQuestion(isAsked: boolean, figures: string) {
  const box = useRef<HTMLInputElement>(null);
  // An answer is to these figures; others are asked about anew.
  const [answered, setAnswered] = useState<string | null>(null);
  const isAccepted = answered === figures;
  return {
    isAccepted,
    accept: (isYes: boolean) => setAnswered(isYes ? figures : null),
    box,
    isSettled() {
      if (!isAsked || isAccepted) return true;
      const folded = box.current?.closest("details");
      if (folded) folded.open = true;
      box.current?.focus();
      return false;
    },
  };
}

/** Holds a form's spectrum to its level; what misses it is sent only once somebody has said that it is meant. */
export function useSpectrumCheck(bands: unknown, levelDb: unknown): SpectrumCheck {
  const found = checkSpectrum(bands, levelDb);
  const question = useFiguresQuestion(found?.isAsked ?? false, JSON.stringify([bands, levelDb]));
  return { found, ...question };
}

/** Octave levels, typed, pasted or from a file, with what they add up to. */
export function SpectrumField<Values extends FieldValues, Output>({
  form,
  name,
  label,
  note,
  check,
  onTakeLevel,
}: {
  form: UseFormReturn<Values, unknown, Output>;
  name: FieldPath<Values>;
  label: string;
  note?: ReactNode;
  check: SpectrumCheck;
  /** Puts what the bands add up to into the level's field. */
  onTakeLevel?: (levelDb: number) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const id = useId();
  const [fileWord, setFileWord] = useState<string | null>(null);

  const put = (bands: readonly (number | null)[]) =>
    form.setValue(name, bands as PathValue<Values, FieldPath<Values>>, {
      shouldDirty: true,
      shouldValidate: form.formState.isSubmitted,
    });

  async function take(file: File | undefined) {
    if (!file) return;
    const text = file.size > MOST_BYTES ? "" : await file.text();
    // In a file a line end ends each line, the last one too.
    const lines = text.replace(/^\ufeff/, "").replace(/\r?\n$/, "");
    const found = readBands(lines, locale, { thirds: "sum" });
    const read = found?.read;
    const values = [...(read?.from === 1 ? [null] : []), ...(read?.values ?? [])];
    const isWhole = isSpectrum(values);
    setFileWord(
      [
        isWhole
          ? i18n.t("Read from {file}.", { file: file.name })
          : i18n.t("{file} holds no levels of eight octave bands.", { file: file.name }),
        found?.refusal && refusalWords(i18n, found.refusal),
        isWhole && read && readWords(i18n, read),
      ]
        .filter(Boolean)
        .join(" "),
    );
    if (isWhole) put(values);
  }

  const { found } = check;
  return (
    <div className="spectrum-field">
      <BandFields
        form={form}
        name={name}
        label={label}
        rows={[{ label: i18n.t("Octave band level") }]}
        thirds="sum"
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
              {i18n.t("The level is right although the bands lie {difference} dB away from it.", {
                difference: formatLevelChange(found.offDb, locale),
              })}
            </span>
          </label>
        )}
        {found?.isAsked && found.offDb !== null && onTakeLevel && (
          <span className="spectrum-ways">
            <TextButton onClick={() => onTakeLevel(roundTo(found.sumDb, 1))}>
              {i18n.t("Take the bands’ level, {level} dB(A)", {
                level: formatLevel(found.sumDb, locale),
              })}
            </TextButton>
            <TextButton
              onClick={() => {
                const bands = form.getValues(name) as readonly (number | null)[];
                const shiftDb = roundTo(-(found.offDb ?? 0), 1);
                put(bands.map((band) => (band === null ? null : roundTo(band + shiftDb, 1))));
              }}
            >
              {i18n.t("Shift the bands with it, by {difference} dB", {
                difference: formatLevelChange(-found.offDb, locale),
              })}
            </TextButton>
          </span>
        )}
      </div>
    </div>
  );
}
