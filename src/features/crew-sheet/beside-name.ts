import type { I18n } from "@lingui/core";
import { formatDay } from "../../../shared/format/date";
import type { Locale } from "../../../shared/i18n";
import { isolate } from "../../../shared/i18n/isolate";
import type { CrewSheetRow } from "../../../shared/schemas/crew";

/** By whom somebody is employed; nothing of one's own people. */
export function employerWords(
  i18n: I18n,
  { employer, employerName }: CrewSheetRow["worker"],
): string | null {
  if (employer === "own") return null;
  if (employer === "agency")
    return employerName
      ? i18n.t("agency: {name}", { name: isolate(employerName) })
      : i18n.t("from an agency");
  return employerName
    ? i18n.t("contractor: {name}", { name: isolate(employerName) })
    : i18n.t("from a contractor");
}

export const lentWords = (
  i18n: I18n,
  locale: Locale,
  { crewName, untilDate }: NonNullable<CrewSheetRow["lentTo"]>,
): string =>
  untilDate === null
    ? i18n.t("lent to {crew}", { crew: isolate(crewName) })
    : i18n.t("lent to {crew} until {day}", {
        crew: isolate(crewName),
        day: formatDay(untilDate, locale),
      });
