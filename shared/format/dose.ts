import type { Locale } from "../i18n/index";
import { formatNumber, NO_FIGURE } from "./number";

/** A dose: 1 %, below 10 % to 0.1 %; with at least so many decimals where it is tested. The unit comes with a no-break space. */
export function formatDose(dosePct: number | null, locale: Locale, least = 0): string {
  if (dosePct === null || !Number.isFinite(dosePct)) return NO_FIGURE;
  // By the number that is shown: 9.96 rounds to 10, and is then a two-digit dose.
  const digits = Math.max(least, Math.abs(dosePct) < 9.95 ? 1 : 0);
  return `${formatNumber(dosePct, digits, locale)}\u00a0%`;
}

/** A share of something, whole percent. */
export function formatShare(sharePct: number | null, locale: Locale): string {
  return sharePct === null ? NO_FIGURE : `${formatNumber(sharePct, 0, locale)}\u00a0%`;
}
