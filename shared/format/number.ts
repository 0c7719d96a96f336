import type { Locale } from "../i18n/index";

export const MINUS = "\u2212";
/** What stands where there is no number: never 0. */
export const NO_FIGURE = "\u2013";

const decimalMarks = new Map<Locale, string>();
/** A point in English, a comma in most other languages. */
export function decimalMark(locale: Locale): string {
  let mark = decimalMarks.get(locale);
  if (mark === undefined) {
    const parts = new Intl.NumberFormat(locale).formatToParts(0.5);
    mark = parts.find(({ type }) => type === "decimal")?.value ?? ".";
    decimalMarks.set(locale, mark);
  }
  return mark;
}

/** Rounds half away from zero on the decimal digits, so that 86.65 is 86.7 whatever its binary neighbour says. */
export function roundTo(value: number, digits: number): number {
  const [mantissa, exponent = "0"] = Math.abs(value).toExponential().split("e");
  const rounded = Math.round(Number(`${mantissa}e${Number(exponent) + digits}`));
  return Math.sign(value) * Number(`${rounded}e${-digits}`);
}

/** A plain number with a fixed count of decimals, true minus and the locale's mark; thousands apart by a thin space. */
export function formatNumber(value: number | null, digits: number, locale: Locale): string {
  if (value === null || !Number.isFinite(value)) return NO_FIGURE;
  const rounded = roundTo(value, digits);
  const [whole = "0", fraction] = Math.abs(rounded).toFixed(digits).split(".");
  const grouped = whole.length > 3 ? whole.replace(/\B(?=(\d{3})+$)/g, "\u202f") : whole;
  const sign = rounded < 0 ? MINUS : "";
  return fraction === undefined
    ? `${sign}${grouped}`
    : `${sign}${grouped}${decimalMark(locale)}${fraction}`;
}

/** As typed into a field: no thousands mark, all stored digits. */
export function editNumber(value: number | null, locale: Locale): string {
  if (value === null || !Number.isFinite(value)) return "";
  return String(value).replace(".", decimalMark(locale)).replace("-", MINUS);
}

/** Nobody types more digits than this. */
const TYPED_DIGITS = 10;

/**
 * A number as it stands in a field: what a computation left, with more digits than anybody types, to 0.01. The field holds
 * all of it as long as nobody writes into it.
 */
export function fieldNumber(value: number | null, locale: Locale): string {
  if (value === null || !Number.isFinite(value)) return "";
  const isComputed = Number(value.toPrecision(TYPED_DIGITS)) !== value;
  return editNumber(isComputed ? roundTo(value, 2) : value, locale);
}

export type Parsed<T> =
  | { readonly kind: "empty" }
  | { readonly kind: "ok"; readonly value: T }
  | { readonly kind: "ambiguous" }
  | { readonly kind: "invalid" };

/**
 * A number as a person types it. The comma is a decimal mark where the locale writes it so. The other locale's mark is
 * taken only where it can't be a thousands mark: "86.7" is clear everywhere, "1.234" in German or "1,234" in English is
 * ambiguous, and "86,7" in English is refused.
 */
export function parseNumber(text: string, locale: Locale): Parsed<number> {
  const typed = text.trim().replace(/[\u2212\u2013]/g, "-");
  if (typed === "") return { kind: "empty" };
  if (!/^-?[\d.,]+$/.test(typed)) return { kind: "invalid" };
  const marks: readonly string[] = typed.match(/[.,]/g) ?? [];
  if (marks.length > 1) return { kind: marks.includes(",") ? "ambiguous" : "invalid" };
  const mark = marks[0];
  if (mark !== undefined && mark !== decimalMark(locale)) {
    const looksLikeThousands = /^-?\d{1,3}[.,]\d{3}$/.test(typed);
    if (looksLikeThousands || locale === "en") return { kind: "ambiguous" };
  }
  const plain = typed.replace(",", ".");
  if (!/\d/.test(plain)) return { kind: "invalid" };
  const value = Number(plain);
  return Number.isFinite(value) ? { kind: "ok", value } : { kind: "invalid" };
}
