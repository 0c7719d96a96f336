import type { Locale } from "../i18n/index";

/** Day before month in both languages. */
const LANGUAGE_TAG: Readonly<Record<Locale, string>> = { en: "en-GB", de: "de-DE" };

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
    formatter = new Intl.DateTimeFormat(LANGUAGE_TAG[locale], {
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

/** "1 December 2026", "1. Dezember 2026". */
export function formatDate(isoDate: string, locale: Locale): string {
  const { day, month, year } = localParts(isoDate, locale);
  return locale === "de" ? `${day}. ${month} ${year}` : `${day} ${month} ${year}`;
}

/** "Tuesday 1 December", "Dienstag, 1. Dezember": a day near today, where the year is plain. */
export function formatDay(isoDate: string, locale: Locale): string {
  const { weekday, day, month } = localParts(isoDate, locale);
  return locale === "de" ? `${weekday}, ${day}. ${month}` : `${weekday} ${day} ${month}`;
}

/** "Tuesday 1 December 2026", "Dienstag, 1. Dezember 2026": beside a field in which a date of any year is chosen. */
export function formatLongDay(isoDate: string, locale: Locale): string {
  const { weekday } = localParts(isoDate, locale);
  return `${weekday}${locale === "de" ? "," : ""} ${formatDate(isoDate, locale)}`;
}

/** "1 Dec 2026", "01.12.2026": for columns. */
export function formatShortDate(isoDate: string, locale: Locale): string {
  const { day, month, year } = localParts(isoDate, locale, locale === "de" ? "2-digit" : "short");
  return locale === "de"
    ? `${day.padStart(2, "0")}.${month}.${year}`
    : `${day} ${short(month)} ${year}`;
}

/** "8 Apr", "8. Apr": within the year, for columns. */
export function formatDayMonth(isoDate: string, locale: Locale): string {
  const { day, month } = localParts(isoDate, locale);
  return locale === "de" ? `${day}. ${short(month)}` : `${day} ${short(month)}`;
}

/** "Thu 3", "Do 3.": within the week. */
export function formatWeekday(isoDate: string, locale: Locale): string {
  const { weekday, day } = localParts(isoDate, locale, "short");
  return locale === "de" ? `${weekday.replace(".", "")} ${day}.` : `${weekday} ${day}`;
}

export function formatMonth(isoDate: string, locale: Locale): string {
  return short(localParts(isoDate, locale, "long").month);
}

/** "22:00" of an instant in the site's zone. */
export function formatTime(instant: string, timeZone: string): string {
  const { hour, minute } = partsOf(new Date(instant), "en", timeZone);
  return `${hour}:${minute}`;
}

/** "1 December 2026, 06:12" of an instant in the site's zone. */
export function formatInstant(instant: string, timeZone: string, locale: Locale): string {
  return `${formatDate(localDateOf(instant, timeZone), locale)}, ${formatTime(instant, timeZone)}`;
}

/** The local date of an instant in the site's zone, "2026-12-01". */
export function localDateOf(instant: string, timeZone: string): string {
  const { day, month, year } = partsOf(new Date(instant), "en", timeZone, "2-digit");
  return `${year}-${month}-${day.padStart(2, "0")}`;
}

/** A date as a person types it: ISO everywhere, `1.12.2026` in German, `1/12/2026` (day first) in English. */
export function parseDate(text: string, locale: Locale): string | null {
  const typed = text.trim();
  const iso = /^(\d{4})-(\d{1,2})-(\d{1,2})$/.exec(typed);
  const local = (
    locale === "de" ? /^(\d{1,2})\.(\d{1,2})\.(\d{4})$/ : /^(\d{1,2})\/(\d{1,2})\/(\d{4})$/
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
