import type { I18n } from "@lingui/core";
import type { MeterSettings } from "../../../shared/acoustics/types";
import { formatDuration } from "../../../shared/format/duration";
import { formatLimit } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import type { Locale } from "../../../shared/i18n";
import type { HistoryView } from "../../../shared/schemas/history";
import { type ClockChange, clockText, type HistoryClock } from "./history-clock";
import type { Drawn } from "./history-stretches";

export type Bound = "exact" | "upper" | "lower";

export const clockOf = ({
  startsAt,
  intervalMs,
  valuesCount,
  timeZone,
}: Pick<HistoryView, "startsAt" | "intervalMs" | "valuesCount" | "timeZone">): HistoryClock => ({
  startMs: Date.parse(startsAt),
  lengthS: (intervalMs * valuesCount) / 1000,
  timeZone,
});

interface Served {
  /** Criteria that a setting serves, keys of the catalogue; empty for an instrument's own setting. */
  readonly label: string;
  readonly settings: MeterSettings;
}

/** Criteria by name: one setting may serve several. */
export function criteriaNames(i18n: I18n, label: string): string[] {
  return label === "" ? [] : [...new Set(label.split(" · "))].map((name) => i18n._(name));
}

/** "Action value, 85", short enough for the end of a line; an instrument's own settings by their numbers. */
export function criterionText(i18n: I18n, { label, settings }: Served, locale: Locale): string {
  const [first] = criteriaNames(i18n, label);
  const level = formatLimit(settings.criterionLevelDb, locale);
  if (first !== undefined) return i18n.t("{criterion}, {level}", { criterion: first, level });
  return i18n.t("{level} dB, {exchange} dB exchange", {
    level,
    exchange: settings.exchangeRateDb,
  });
}

export function boundWord(i18n: I18n, bound: Bound): string {
  switch (bound) {
    case "exact":
      return i18n.t("exact");
    case "upper":
      return i18n.t("at most");
    case "lower":
      return i18n.t("at least");
  }
}

/** How time that is left out was. */
export function unaccountedText(
  i18n: I18n,
  leftOut: NonNullable<HistoryView["leftOut"]>,
  locale: Locale,
): string {
  switch (leftOut.how) {
    case "unknown":
      return i18n.t("not known");
    case "like-the-rest":
      return i18n.t("like the rest");
    case "quiet":
      return i18n.t("quiet, {level} dB", { level: formatLimit(leftOut.levelDb, locale) });
  }
}

export const changeText = (i18n: I18n, { byMin }: ClockChange): string =>
  byMin > 0
    ? i18n.t("clock set forward {minutes} min", { minutes: byMin })
    : i18n.t("clock set back {minutes} min", { minutes: -byMin });

export function stretchName(
  i18n: I18n,
  one: Drawn,
  taskNames: Readonly<Record<string, string>>,
): string {
  if (one.kind === "left-out") return one.reason;
  return taskNames[one.taskId] ?? i18n.t("A task that is gone");
}

/** Under a quarter of an hour to the second, where it has any: "4 min 20 s". */
export function lengthText(i18n: I18n, lengthS: number, locale: Locale): string {
  const wholeS = Math.round(lengthS);
  const [minutes, seconds] = [Math.floor(wholeS / 60), wholeS % 60];
  if (wholeS < 60) return i18n.t("{seconds} s", { seconds: formatNumber(wholeS, 0, locale) });
  if (wholeS >= 900 || seconds === 0) return formatDuration(lengthS / 60, locale);
  return i18n.t("{minutes} min {seconds} s", { minutes, seconds });
}

export const rangeText = (
  clock: HistoryClock,
  { fromS, toS }: { fromS: number; toS: number },
): string => {
  const seconds = toS - fromS < 120;
  return `${clockText(clock, fromS, seconds)}–${clockText(clock, toS, seconds)}`;
};
