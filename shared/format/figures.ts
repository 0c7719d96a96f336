import type { Locale } from "../i18n/index";
import { formatNumber, NO_FIGURE, roundTo } from "./number";

const DECIMALS = 3;

/** Mantissa to three decimals and exponent of a number as it stands in a working: 7.070 and 9 of 7.07e9. */
export function scientificParts(
  value: number,
  locale: Locale,
): { mantissa: string; exponent: number } | null {
  if (!Number.isFinite(value)) return null;
  if (value === 0) return { mantissa: formatNumber(0, DECIMALS, locale), exponent: 0 };
  let exponent = Math.floor(Math.log10(Math.abs(value)));
  // 9.9996 rounds to 10.000 and belongs to the next power.
  if (Math.abs(roundTo(value / 10 ** exponent, DECIMALS)) >= 10) exponent += 1;
  return { mantissa: formatNumber(value / 10 ** exponent, DECIMALS, locale), exponent };
}

/** A constant or an intermediate number: four figures, without the zeros that say nothing. */
export function formatFigures(value: number, locale: Locale): string {
  if (!Number.isFinite(value)) return NO_FIGURE;
  if (value === 0) return formatNumber(0, 0, locale);
  const whole = Math.floor(Math.log10(Math.abs(value))) + 1;
  const most = Math.max(0, Math.min(6, 4 - whole));
  const rounded = roundTo(value, most);
  let digits = most;
  while (digits > 0 && roundTo(rounded, digits - 1) === rounded) digits -= 1;
  return formatNumber(rounded, digits, locale);
}
