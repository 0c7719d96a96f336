import type { Locale } from "../i18n/index";
import { formatNumber, MINUS, NO_FIGURE, roundTo } from "./number";

export type LevelBound = "exact" | "upper" | "lower";

export const BOUND_MARK: Readonly<Record<LevelBound, string>> = {
  exact: "",
  upper: "\u2264",
  lower: "\u2265",
};

/** A level to 0.1 dB (with more `digits` in a working's equations), without its unit: "86.7", "≥84.1", "–" where there is none. */
export function formatLevel(
  levelDb: number | null,
  locale: Locale,
  bound: LevelBound = "exact",
  digits = 1,
): string {
  if (levelDb === null || !Number.isFinite(levelDb)) return NO_FIGURE;
  return `${BOUND_MARK[bound]}${formatNumber(levelDb, digits, locale)}`;
}

export function formatLevelWithUnit(
  levelDb: number | null,
  locale: Locale,
  bound: LevelBound = "exact",
): string {
  return levelDb === null ? NO_FIGURE : `${formatLevel(levelDb, locale, bound)}\u00a0dB`;
}

/** Whole decibels, for the worker's own page; with a tenth where it would read as the limit that it is not at. */
export function formatWholeLevel(
  levelDb: number | null,
  locale: Locale,
  limitDb: number | null = null,
): string {
  const isBesideLimit =
    levelDb !== null &&
    limitDb !== null &&
    levelDb !== limitDb &&
    roundTo(levelDb, 0) === roundTo(limitDb, 0);
  return formatNumber(levelDb, isBesideLimit ? 1 : 0, locale);
}

/** A limit or an action value: as short as it is, "87", "80.5". */
export function formatLimit(levelDb: number, locale: Locale): string {
  return formatNumber(levelDb, Number.isInteger(roundTo(levelDb, 1)) ? 0 : 1, locale);
}

/** "±2.3"; empty where no uncertainty is stated, for that is not ±0. */
export function formatUncertainty(uncertaintyDb: number | null, locale: Locale): string {
  return uncertaintyDb === null ? "" : `\u00b1${formatNumber(uncertaintyDb, 1, locale)}`;
}

/** A difference with its sign: "+1.7", "−0.3". */
export function formatLevelChange(changeDb: number | null, locale: Locale): string {
  if (changeDb === null) return NO_FIGURE;
  const text = formatNumber(changeDb, 1, locale);
  return roundTo(changeDb, 1) > 0 && !text.startsWith(MINUS) ? `+${text}` : text;
}
