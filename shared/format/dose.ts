import type { Locale } from "../i18n/index";
import { BOUND_MARK, type LevelBound } from "./level";
import { formatNumber, NO_FIGURE } from "./number";

/** A dose: 1 %, below 10 % to 0.1 %; with at least so many decimals where it is tested. The unit comes with a no-break space. */
export function formatDose(dosePct: number | null, locale: Locale, least = 0): string {
  if (dosePct === null || !Number.isFinite(dosePct)) return NO_FIGURE;
  // By the number that is shown: 9.96 rounds to 10, and is then a two-digit dose.
  const digits = Math.max(least, Math.abs(dosePct) < 9.95 ? 1 : 0);
  return `${formatNumber(dosePct, digits, locale)}\u00a0%`;
}

/** A dose that may only be a bound of the true one: "≥140 %". */
export function formatBoundedDose(
  dosePct: number | null,
  bound: LevelBound,
  locale: Locale,
): string {
  return `${dosePct === null ? "" : BOUND_MARK[bound]}${formatDose(dosePct, locale)}`;
}

/** A share of something, whole percent. */
export function formatShare(sharePct: number | null, locale: Locale): string {
  return sharePct === null ? NO_FIGURE : `${formatNumber(sharePct, 0, locale)}\u00a0%`;
}

/** A probability or a share of a population, percent: near nothing and near all of it to 0.1 %, where 0 or 100 would be untrue. */
export function formatChance(sharePct: number, locale: Locale): string {
  const isNearEnd = sharePct < 0.95 || sharePct >= 99.05;
  const isEnd = sharePct === 0 || sharePct === 100;
  return `${formatNumber(sharePct, isNearEnd && !isEnd ? 1 : 0, locale)}\u00a0%`;
}
