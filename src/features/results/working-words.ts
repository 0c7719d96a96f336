import type { I18n } from "@lingui/core";
import { SOURCES } from "../../../shared/acoustics/sources";
import type { AttenuationMethod } from "../../../shared/acoustics/types";
import type {
  MathPart,
  WorkingSource,
  WorkingText,
  WorkingValue,
} from "../../../shared/acoustics/working";
import { reasonText } from "../../../shared/findings/reasons";
import { formatDate } from "../../../shared/format/date";
import { formatDose, formatShare } from "../../../shared/format/dose";
import { formatMinutes } from "../../../shared/format/duration";
import { equationDigits, followsAsPrinted, holdsAsPrinted } from "../../../shared/format/equation";
import { formatFigures, scientificParts } from "../../../shared/format/figures";
import { formatLevel, formatLimit } from "../../../shared/format/level";
import { formatNumber, NO_FIGURE } from "../../../shared/format/number";
import type { Locale } from "../../../shared/i18n/index";
import { protectorWordText } from "../../components/protector-word";
import { verdictWord } from "../../components/verdict";

export function methodText(i18n: I18n, method: AttenuationMethod): string {
  switch (method) {
    case "octave-band":
      return i18n.t("Octave-band");
    case "hml":
      return "HML";
    case "snr":
      return "SNR";
    case "us-single-number":
      return i18n.t("US single number");
    case "percentile":
      return i18n.t("Percentile rating");
    case "slc80":
      return "SLC80";
    case "own-fit":
      return i18n.t("Own fit");
  }
}

/** Values of a message that are a rule's own, not computed: as short as the rule prints them. */
const LIMIT_NAMES: ReadonlySet<string> = new Set([
  "value",
  "action",
  "five",
  "ten",
  "fifteen",
  "target",
]);
const COMPARATORS: ReadonlySet<string> = new Set([">", "≥", "<", "≤"]);

export const limitText = (i18n: I18n, locale: Locale, value: WorkingValue): string =>
  value.kind === "level" ? formatLimit(value.db, locale) : workingValueText(i18n, locale, value);

/** What stands after a comparator is the rule's value. */
export const isLimitAt = (parts: readonly MathPart[], index: number): boolean => {
  const before = parts[index - 1];
  return before?.kind === "sign" && COMPARATORS.has(before.text);
};

/** A message of the working in the reader's language, with its numbers put in. */
export function workingText(i18n: I18n, locale: Locale, text: WorkingText): string {
  const values = Object.fromEntries(
    Object.entries(text.values ?? {}).map(([name, value]) => [
      name,
      LIMIT_NAMES.has(name)
        ? limitText(i18n, locale, value)
        : workingValueText(i18n, locale, value),
    ]),
  );
  return i18n._(text.id, values);
}

const BOUND_SIGNS = { upper: "≤", lower: "≥" } as const;

const SUPERSCRIPTS: Readonly<Record<string, string>> = {
  "-": "⁻",
  "0": "⁰",
  "1": "¹",
  "2": "²",
  "3": "³",
  "4": "⁴",
  "5": "⁵",
  "6": "⁶",
  "7": "⁷",
  "8": "⁸",
  "9": "⁹",
};
const raised = (exponent: number): string =>
  [...String(exponent)].map((sign) => SUPERSCRIPTS[sign] ?? sign).join("");

/** Decimals of what is printed: of levels and differences, and of a dose where it is tested. */
export interface Decimals {
  readonly levels: number;
  readonly dose: number;
}

const PLAIN: Decimals = { levels: 1, dose: 0 };

/** A number or word of the working, rounded by its kind as a reader sees it. */
export function workingValueText(
  i18n: I18n,
  locale: Locale,
  value: WorkingValue,
  decimals: Decimals = PLAIN,
): string {
  switch (value.kind) {
    case "level":
      return formatLevel(value.db, locale, value.bound, decimals.levels);
    case "difference":
      return formatNumber(value.db, decimals.levels, locale);
    case "minutes":
      return formatMinutes(value.min, locale);
    case "share":
      return formatShare(value.pct, locale);
    case "dose":
      return `${value.bound ? BOUND_SIGNS[value.bound] : ""}${formatDose(value.pct, locale, decimals.dose)}`;
    case "scientific": {
      const parts = scientificParts(value.number, locale);
      return parts ? `${parts.mantissa} × 10${raised(parts.exponent)}` : NO_FIGURE;
    }
    case "number":
      return formatFigures(value.number, locale);
    case "verdict": {
      const word = verdictWord(i18n, value.verdict);
      return value.verdict === "over" && value.isClear
        ? i18n.t("{verdict}, clearly", { verdict: word })
        : word;
    }
    case "protector-word":
      return protectorWordText(i18n, value.word);
    case "method":
      return methodText(i18n, value.method);
    case "reason":
      return reasonText(i18n, value.reason);
    case "date":
      return formatDate(value.date, locale);
    case "name":
      return value.name;
    case "text":
      return workingText(i18n, locale, value.text);
    case "source":
      return shortSourceText(i18n, value.source);
    case "list":
      return value.values
        .map((one) => workingValueText(i18n, locale, one))
        .join(value.values.some(({ kind }) => kind === "text" || kind === "source") ? "; " : " ");
    case "math":
      return mathText(i18n, locale, value.parts, true);
  }
}

/** A document as it is cited, in the reader's language where its words have one; empty where nothing is to be cited. */
export function sourceText(i18n: I18n, { id, clause }: WorkingSource): string {
  const cited = clause === "" ? "" : i18n._(clause);
  if (id === null) return cited;
  const { title, edition, status } = SOURCES[id];
  const whole = [i18n._(title), i18n._(edition), cited].filter(Boolean).join(", ");
  return status === "from-memory"
    ? i18n.t("{cited} (clause from memory)", { cited: whole })
    : whole;
}

/** A document by its number and the clause, as it is cited in a table: the step's margin has its title. */
export function shortSourceText(i18n: I18n, { id, clause }: WorkingSource): string {
  const number = id === null ? "" : (i18n._(SOURCES[id].title).split(", ")[0] ?? "");
  return [number, clause === "" ? "" : i18n._(clause)].filter(Boolean).join(", ");
}

/** A step's documents; several clauses of one are cited together. */
export function sourceTexts(i18n: I18n, sources: readonly WorkingSource[]): string[] {
  const whole: WorkingSource[] = [];
  for (const { id, clause } of sources) {
    const translated = clause === "" ? "" : i18n._(clause);
    const at = id === null ? -1 : whole.findIndex((source) => source.id === id);
    if (at < 0) whole.push({ id, clause: translated });
    else whole[at] = { id, clause: [whole[at]?.clause, translated].filter(Boolean).join(", ") };
  }
  return whole.flatMap((source) => sourceText(i18n, source) || []);
}

/** Test cells show what was compared, which is unrounded; in an equation the numbers follow from one another. */
const TEST_DECIMALS = 4;

/** How an equation is printed: with as many decimals as make it follow, and no sign before a sign. */
export function printedMath(
  i18n: I18n,
  parts: readonly MathPart[],
  isTest = false,
): { parts: readonly MathPart[]; decimals: Decimals } {
  const tidy = withoutDoubleSigns(parts);
  const of = (levels: number): Decimals => ({ levels, dose: isTest ? levels : 0 });
  const levels = equationDigits(
    (digits) => plainText(i18n, "en", tidy, of(digits)),
    isTest ? TEST_DECIMALS : 1,
    isTest ? holdsAsPrinted : followsAsPrinted,
  );
  return { parts: tidy, decimals: of(levels) };
}

/** "+ −0.7" is "− 0.7". */
function withoutDoubleSigns(parts: readonly MathPart[]): MathPart[] {
  const tidy: MathPart[] = [];
  for (const part of parts) {
    const before = tidy.at(-1);
    const { value } = part.kind === "value" ? part : { value: null };
    const isSigned =
      before?.kind === "sign" && (before.text === "+" || before.text === "−") && tidy.length > 1;
    if (
      isSigned &&
      value &&
      (value.kind === "difference" || value.kind === "level") &&
      value.db < 0
    ) {
      tidy[tidy.length - 1] = { kind: "sign", text: before.text === "+" ? "−" : "+" };
      tidy.push({ ...part, value: { ...value, db: -value.db } } as MathPart);
    } else if (part.kind === "fraction")
      tidy.push({
        ...part,
        over: withoutDoubleSigns(part.over),
        under: withoutDoubleSigns(part.under),
      });
    else if (part.kind === "power")
      tidy.push({ ...part, exponent: withoutDoubleSigns(part.exponent) });
    else tidy.push(part);
  }
  return tidy;
}

/** An equation as one line of text: what is read out, and what stands in the CSV. */
export function mathText(
  i18n: I18n,
  locale: Locale,
  parts: readonly MathPart[],
  isTest = false,
): string {
  const printed = printedMath(i18n, parts, isTest);
  return plainText(i18n, locale, printed.parts, printed.decimals);
}

const plainText = (
  i18n: I18n,
  locale: Locale,
  parts: readonly MathPart[],
  decimals: Decimals,
): string =>
  parts
    .map((part, index) => partText(i18n, locale, part, isLimitAt(parts, index), decimals))
    .join(" ")
    .replaceAll(" ,", ",");

function partText(
  i18n: I18n,
  locale: Locale,
  part: MathPart,
  isLimit: boolean,
  decimals: Decimals,
): string {
  switch (part.kind) {
    case "sign":
      return part.text;
    case "symbol":
      return `${part.base}${part.isAtEar ? "′" : ""}${part.sub ? ` ${part.sub}` : ""}`;
    case "value":
      return isLimit
        ? limitText(i18n, locale, part.value)
        : workingValueText(i18n, locale, part.value, decimals);
    case "sum":
      return "Σ";
    case "fraction":
      return `${plainText(i18n, locale, part.over, decimals)} / ${plainText(i18n, locale, part.under, decimals)}`;
    case "power":
      return `${part.base}^(${plainText(i18n, locale, part.exponent, decimals)})`;
  }
}
