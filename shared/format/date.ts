import type { Locale } from "../i18n/index";
import { decimalMark } from "./number";

/** English with the day before the month; every other language as its own country writes it. */
const languageTag = (locale: Locale): string => (locale === "en" ? "en-GB" : locale);

type Parts = Readonly<Record<"weekday" | "day" | "month" | "year" | "hour" | "minute", string>>;

/** Building a formatter costs a hundred times what using it does, and a list asks for the same one in every row. */
const formatters = new Map<string, Intl.DateTimeFormat>();

function partsOf(
  date: Date,
  locale: Locale,
  timeZone: string,
  names: "long" | "short" | "2-digit" = "long",
): Parts {
  const key = `${locale} ${timeZone} ${names}`;
  let formatter = formatters.get(key);
  if (!formatter) {
    formatter = new Intl.DateTimeFormat(languageTag(locale), {
      timeZone,
      weekday: names === "2-digit" ? "short" : names,
      day: "numeric",
      month: names,
      year: "numeric",
      hour: "2-digit",
      minute: "2-digit",
      hourCycle: "h23",
    });
    formatters.set(key, formatter);
  }
  const parts = { weekday: "", day: "", month: "", year: "", hour: "", minute: "" };
  for (const { type, value } of formatter.formatToParts(date))
    if (type in parts) parts[type as keyof Parts] = value;
  return parts;
}

/** A local date belongs to no zone; both ways through UTC it stays the day that it is. */
const localDate = (isoDate: string) => new Date(`${isoDate}T00:00:00Z`);
const localParts = (
  isoDate: string,
  locale: Locale,
  names: "long" | "short" | "2-digit" = "long",
) => partsOf(localDate(isoDate), locale, "UTC", names);

/** The short name without its point, and "Sep" in either language: the browsers do not agree. */
const short = (name: string) => name.replace(".", "").slice(0, 3);

const wholeDates = new Map<string, Intl.DateTimeFormat>();
/** A local date by the language's own pattern. */
function writeDate(isoDate: string, locale: Locale, pattern: Intl.DateTimeFormatOptions): string {
  const key = `${locale} ${Object.values(pattern).join(" ")}`;
  let formatter = wholeDates.get(key);
  if (!formatter) {
    formatter = new Intl.DateTimeFormat(languageTag(locale), { timeZone: "UTC", ...pattern });
    wholeDates.set(key, formatter);
  }
  return formatter.format(localDate(isoDate));
}

/** "1 December 2026", "1. Dezember 2026", "1 de diciembre de 2026", "1 grudnia 2026". */
export function formatDate(isoDate: string, locale: Locale): string {
  return writeDate(isoDate, locale, { day: "numeric", month: "long", year: "numeric" });
}

/** English writes no comma after the weekday. */
const afterWeekday = (locale: Locale) => (locale === "en" ? " " : ", ");

/** "Tuesday 1 December", "Dienstag, 1. Dezember": a day near today, where the year is plain. */
export function formatDay(isoDate: string, locale: Locale): string {
  const { weekday } = localParts(isoDate, locale);
  const day = writeDate(isoDate, locale, { day: "numeric", month: "long" });
  return `${weekday}${afterWeekday(locale)}${day}`;
}

/** "Tuesday 1 December 2026", "Dienstag, 1. Dezember 2026": beside a field in which a date of any year is chosen. */
export function formatLongDay(isoDate: string, locale: Locale): string {
  const { weekday } = localParts(isoDate, locale);
  return `${weekday}${afterWeekday(locale)}${formatDate(isoDate, locale)}`;
}

/** "1 Dec 2026", "01.12.2026", "01/12/2026": for columns. */
export function formatShortDate(isoDate: string, locale: Locale): string {
  if (locale !== "en")
    return writeDate(isoDate, locale, { day: "2-digit", month: "2-digit", year: "numeric" });
  const { day, month, year } = localParts(isoDate, locale, "short");
  return `${day} ${short(month)} ${year}`;
}

/** German writes a point after the number of a day. */
const dayNumber = (day: string, locale: Locale) => (locale === "de" ? `${day}.` : day);

/** "8 Apr", "8. Apr": within the year, for columns. */
export function formatDayMonth(isoDate: string, locale: Locale): string {
  const { day, month } = localParts(isoDate, locale);
  return `${dayNumber(day, locale)} ${short(month)}`;
}

/** The same where the year is today's, else with the year: what has long been due is not taken for this year's. */
export const formatDayMonthNear = (isoDate: string, today: string, locale: Locale): string =>
  isoDate.slice(0, 4) === today.slice(0, 4)
    ? formatDayMonth(isoDate, locale)
    : formatShortDate(isoDate, locale);

/** "Thu 3", "Do 3.": within the week. */
export function formatWeekday(isoDate: string, locale: Locale): string {
  const { weekday, day } = localParts(isoDate, locale, "short");
  return `${weekday.replace(".", "")} ${dayNumber(day, locale)}`;
}

export function formatMonth(isoDate: string, locale: Locale): string {
  return short(localParts(isoDate, locale, "long").month);
}

/** "January" of 1, alone in a column. */
export const formatMonthName = (month: number, locale: Locale): string =>
  new Intl.DateTimeFormat(locale, { month: "long", timeZone: "UTC" }).format(
    new Date(Date.UTC(2026, month - 1, 1)),
  );

/** "22:00" of an instant in the site's zone. */
export function formatTime(instant: string, timeZone: string): string {
  const { hour, minute } = partsOf(new Date(instant), "en", timeZone);
  return `${hour}:${minute}`;
}

/** "1 December 2026, 06:12" of an instant in the site's zone. */
export function formatInstant(instant: string, timeZone: string, locale: Locale): string {
  return `${formatDate(localDateOf(instant, timeZone), locale)}, ${formatTime(instant, timeZone)}`;
}

/**
 * Instants of the site's zone, each told from the others: by minutes, with seconds where two share a minute, with
 * thousandths where two share a second.
 */
export function formatInstantsApart(
  instants: readonly string[],
  timeZone: string,
  locale: Locale,
): string[] {
  const isAlike = (instant: string, length: number) =>
    instants.filter((one) => one.slice(0, length) === instant.slice(0, length)).length > 1;
  return instants.map((instant) => {
    const text = formatInstant(instant, timeZone, locale);
    // Zones differ from UTC by whole minutes: what is finer is the same in all of them.
    const [, seconds = "00", thousandths = "000"] =
      /:(\d{2})(?:\.(\d{3}))?\d*Z$/.exec(instant) ?? [];
    if (isAlike(instant, "2026-12-01T06:12:00".length))
      return `${text}:${seconds}${decimalMark(locale)}${thousandths}`;
    return isAlike(instant, "2026-12-01T06:12".length) ? `${text}:${seconds}` : text;
  });
}

/** The local date of an instant in the site's zone, "2026-12-01". */
export function localDateOf(instant: string, timeZone: string): string {
  const { day, month, year } = partsOf(new Date(instant), "en", timeZone, "2-digit");
  return `${year}-${month}-${day.padStart(2, "0")}`;
}

/** How the language writes a date in figures: with points, or with strokes. */
export const datePattern = (locale: Locale): "dd.mm.yyyy" | "dd/mm/yyyy" =>
  writeDate("2026-12-01", locale, { day: "2-digit", month: "2-digit", year: "numeric" }).includes(
    ".",
  )
    ? "dd.mm.yyyy"
    : "dd/mm/yyyy";

/** A date as a person types it: ISO everywhere, `1.12.2026` in German and Polish, `1/12/2026` (day first) in English and Spanish. */
export function parseDate(text: string, locale: Locale): string | null {
  const typed = text.trim();
  const iso = /^(\d{4})-(\d{1,2})-(\d{1,2})$/.exec(typed);
  const local = (
    datePattern(locale) === "dd.mm.yyyy"
      ? /^(\d{1,2})\.(\d{1,2})\.(\d{4})$/
      : /^(\d{1,2})\/(\d{1,2})\/(\d{4})$/
  ).exec(typed);
  const parts = iso ? [iso[1], iso[2], iso[3]] : local ? [local[3], local[2], local[1]] : null;
  if (!parts) return null;
  const [year, month, day] = parts.map(Number) as [number, number, number];
  const date = new Date(Date.UTC(year, month - 1, day));
  const isReal = date.getUTCMonth() === month - 1 && date.getUTCDate() === day;
  return isReal ? date.toISOString().slice(0, 10) : null;
}

/** "06:00" of `6`, `600`, `6:00`, `0600`, `6.00`; null where it is no time of day. */
export function parseTime(text: string): string | null {
  const typed = text.trim();
  const parts = /^(\d{1,2})[:.](\d{2})$/.exec(typed) ?? /^(\d{1,2}?)(\d{2})?$/.exec(typed);
  if (!parts) return null;
  const [hour, minute] = [Number(parts[1]), Number(parts[2] ?? "0")];
  if (hour > 23 || minute > 59) return null;
  return `${String(hour).padStart(2, "0")}:${String(minute).padStart(2, "0")}`;
}
