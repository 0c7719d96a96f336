import type { I18n } from "@lingui/core";
import { formatDate, formatInstant, formatTime, localDateOf } from "../../shared/format/date";
import type { Locale } from "../../shared/i18n/index";

/** When something ends: with a day by its name, at another time with the time. */
export function untilText(i18n: I18n, instant: string, timeZone: string, locale: Locale): string {
  if (formatTime(instant, timeZone) !== "00:00") return formatInstant(instant, timeZone, locale);
  const lastMoment = new Date(Date.parse(instant) - 1).toISOString();
  return i18n.t("end of {day}", { day: formatDate(localDateOf(lastMoment, timeZone), locale) });
}
