import type { I18n } from "@lingui/core";
import { formatShortDate } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel } from "../../../shared/format/level";
import type { Locale } from "../../../shared/i18n/index";
import { LEAST_SAMPLE_MIN } from "../../../shared/schemas/run-doubts";

type Params = Readonly<Record<string, unknown>>;

const numberIn = (params: Params, name: string): number | null =>
  typeof params[name] === "number" ? (params[name] as number) : null;
const dateIn = (params: Params, name: string, locale: Locale): string =>
  typeof params[name] === "string" ? formatShortDate(params[name] as string, locale) : "";

/** What speaks against a run, as a sentence with its numbers. */
export function doubtSentence(i18n: I18n, code: string, params: Params, locale: Locale): string {
  const level = (name: string) => formatLevel(numberIn(params, name), locale);
  switch (code) {
    case "field-check-drift":
      return i18n.t(
        "The field checks are {drift} dB apart; ISO 9612 allows 0.5 and discards the run (12.2).",
        { drift: level("driftDb") },
      );
    case "field-check-mistyped":
      return numberIn(params, "levelDb") === null
        ? i18n.t(
            "One field check says {before}, the other {after} dB. No instrument drifts that far: was one of them mistyped?",
            { before: level("beforeDb"), after: level("afterDb") },
          )
        : i18n.t("A field check says {level} dB, and no calibrator emits that. Was it mistyped?", {
            level: level("levelDb"),
          });
    case "calibration-out-of-date":
      return i18n.t("Its laboratory calibration ran out on {date}.", {
        date: dateIn(params, "dueOn", locale),
      });
    case "calibration-failed":
      return i18n.t("It failed its laboratory calibration on {date}.", {
        date: dateIn(params, "failedOn", locale),
      });
    case "run-too-short": {
      const leastMin = numberIn(params, "leastMin");
      const values = {
        duration: formatDuration(numberIn(params, "durationMin"), locale),
        least: formatDuration(leastMin, locale),
      };
      return leastMin === LEAST_SAMPLE_MIN
        ? i18n.t(
            "It ran for {duration}; at least {least} are asked for, unless the task itself is shorter (ISO 9612:2009, 9.3). Is it?",
            values,
          )
        : i18n.t(
            "It ran for {duration}; at least {least} are wanted, by the survey’s plan or by ISO 9612:2009, 9.3.",
            values,
          );
    }
    case "field-check-missing":
      return i18n.t("A field check is missing; ISO 9612 asks for one before and one after (12.2).");
    case "outside-shift":
      return i18n.t("It lies wholly outside the worker’s shift, {from} to {to}.", {
        from: String(params.from),
        to: String(params.to),
      });
    case "shorter-than-shift":
      return i18n.t("It covers {covered} of a shift of {shift}.", {
        covered: formatDuration(numberIn(params, "coveredMin"), locale),
        shift: formatDuration(numberIn(params, "shiftMin"), locale),
      });
    case "clipped":
      return i18n.t("It showed that it was overloaded.");
    case "under-range":
      return i18n.t("It showed levels under its range.");
    default:
      return i18n.t("Something speaks against this run.");
  }
}
