import type { I18n } from "@lingui/core";
import { formatInstant } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import type { Locale } from "../../../shared/i18n";
import type {
  HistoryChannel,
  HistoryImportView,
  HistoryIssue,
} from "../../../shared/schemas/history";
import type { ColumnRole, DraftFault } from "./mapping";

/** The symbol of a channel, the same in every language. */
export const CHANNEL_SYMBOL: Record<HistoryChannel, string> = {
  laeq: "LAeq",
  las: "LAS",
  "las-max": "LASmax",
  "laf-max": "LAFmax",
  lceq: "LCeq",
  lcpeak: "LCpeak",
  lzpeak: "LZpeak",
};

export function roleText(i18n: I18n, role: ColumnRole): string {
  switch (role) {
    case "":
      return i18n.t("Left alone");
    case "date-time":
      return i18n.t("Date and time");
    case "date":
      return i18n.t("Date");
    case "time":
      return i18n.t("Time of day");
    case "elapsed":
      return i18n.t("Time since the start");
    case "laeq":
      return i18n.t("LAeq, mean of the interval");
    case "las":
      return i18n.t("LAS, slow level");
    case "las-max":
      return i18n.t("LASmax, greatest slow level");
    case "laf-max":
      return i18n.t("LAFmax, greatest fast level");
    case "lceq":
      return i18n.t("LCeq, mean of the interval");
    case "lcpeak":
      return i18n.t("LCpeak");
    case "lzpeak":
      return i18n.t("LZpeak, unweighted");
  }
}

export function importStateText(i18n: I18n, state: HistoryImportView["state"]): string {
  switch (state) {
    case "uploaded":
      return i18n.t("Sent in, not read yet");
    case "reading":
      return i18n.t("Being read");
    case "ready":
      return i18n.t("Ready to store");
    case "refused":
      return i18n.t("Something is open");
    case "storing":
      return i18n.t("Being stored");
    case "stored":
      return i18n.t("Stored");
    case "cancelled":
      return i18n.t("Cancelled");
    case "failed":
      return i18n.t("Given up");
  }
}

export function draftFaultText(i18n: I18n, fault: DraftFault): string {
  switch (fault) {
    case "no-time":
      return i18n.t("Say which column holds the time.");
    case "time-twice-mapped":
      return i18n.t(
        "The time stands in more columns than go together. One, or a date and a time of day.",
      );
    case "no-levels":
      return i18n.t("Say which column holds levels.");
    case "channel-twice":
      return i18n.t("Two columns are said to hold the same level.");
    case "start-missing":
      return i18n.t("The file says no date. Say when it begins.");
    case "skip-missing":
      return i18n.t("Say how many lines stand before the first values.");
  }
}

/** What was found in the file, as a sentence. */
export function historyIssueText(
  i18n: I18n,
  { code, params }: HistoryIssue,
  { locale, timeZone }: { locale: Locale; timeZone: string },
): string {
  const number = (name: string, digits = 0) => formatNumber(Number(params[name]), digits, locale);
  const at = (name: string) => formatInstant(String(params[name]), timeZone, locale);
  const text = String(params.text ?? "");
  const count = Number(params.count ?? 0);
  switch (code) {
    case "not-a-time":
      return i18n.t(
        "“{text}” has no time that can be read. Look at the columns and the order of the date.",
        { text },
      );
    case "cells-missing":
      return i18n.t("The line has only {count, plural, one {# cell} other {# cells}}.", { count });
    case "not-a-level":
      return i18n.t(
        "“{text}” is no level. Where it marks a value over or under the range, enter it as a mark.",
        { text },
      );
    case "levels-with-a-sign":
      return i18n.t(
        "“{text}” has “{sign}” after its number, and so {count, plural, one {has # value} other {have # values}} of this column. Enter “{sign}” as a mark over or under the range, whichever it means.",
        { text, sign: String(params.sign), count },
      );
    case "no-values":
      return i18n.t("No line could be read by this mapping.");
    case "start-missing":
      return i18n.t("The file says no date. Say when it begins.");
    case "zone-in-some-lines":
      return i18n.t("Some lines state their own time zone and some do not.");
    case "too-many-values":
      return i18n.t("The file has more than {limit} lines: no history of 24 hours has so many.", {
        limit: number("limit"),
      });
    case "column-empty":
      return i18n.t("This column holds no level at all.");
    case "levels-in-tenths":
      return i18n.t(
        "Values up to {value}: these are tenths of a decibel. Choose that unit for the column.",
        { value: number("value") },
      );
    case "level-impossible":
      return i18n.t("{value} is no level of a worker’s noise. Look at the column and its unit.", {
        value: number("value", 1),
      });
    case "levels-in-pascals":
      return i18n.t(
        "No value above {highest}: these look like pascals. Choose that unit, or confirm that they are decibels.",
        { highest: number("highest", 2) },
      );
    case "unit-tenths":
      return i18n.t("Read as tenths of a decibel: {highest} is {level} dB.", {
        highest: number("highest"),
        level: formatNumber(Number(params.highest) / 10, 1, locale),
      });
    case "unit-pascals":
      return i18n.t("Read as pascals, and turned into decibels.");
    case "no-interval":
      return i18n.t("There is only one time in the file: no interval can be found.");
    case "interval-unsupported":
      return i18n.t("One value every {seconds} s. Between 1/8 s and 60 s are understood.", {
        seconds: formatNumber(Number(params.intervalMs) / 1000, 3, locale),
      });
    case "interval-irregular":
      return i18n.t("The values do not come at regular times.");
    case "longer-than-a-day":
      return i18n.t("The history goes on for more than 24 hours. Export it in parts.");
    case "clock-went-back":
      return i18n.t(
        "The clock goes back by {seconds} s, and no change of the site’s clock explains it.",
        { seconds: number("seconds") },
      );
    case "clock-jump":
      return i18n.t(
        "{seconds} s are missing: a pause, or a clock that was set. They are stored as missing.",
        { seconds: number("seconds") },
      );
    case "missing-filled":
      return i18n.t(
        "{count, plural, one {# value is} other {# values are}} missing before this line, and stored as missing.",
        { count },
      );
    case "repeated-same":
      return i18n.t(
        "{count, plural, one {# line repeats} other {# lines repeat}} the time and the values of the line before; counted once.",
        { count },
      );
    case "repeated-different":
      return i18n.t("The same time as the line before, with other values. The first one counts.");
    case "lines-share-a-time":
      return i18n.t("{count} lines share each time: read as equal parts of it.", { count });
    case "date-ambiguous":
      return i18n.t("“{text}” can be read in two ways. It is read as {order}.", {
        text,
        order: dateOrderText(i18n, String(params.order)),
      });
    case "time-twice":
      return i18n.t(
        "The file begins in the hour that the clock showed twice. It is taken as the first of the two.",
      );
    case "clock-set-forward":
      return i18n.t("The site’s clock was set forward by {minutes} min here; nothing is missing.", {
        minutes: number("minutes"),
      });
    case "clock-set-back":
      return i18n.t(
        "The site’s clock was set back by {minutes} min here; nothing is counted twice.",
        { minutes: number("minutes") },
      );
    case "clock-not-set":
      return i18n.t(
        "The site’s clock was changed during the history; the instrument’s was not. Its times are kept.",
      );
    case "over-range":
      return i18n.t(
        "{count, plural, one {# value} other {# values}} over the range: the level was higher than the instrument can show. They have no value, and the run needs a reason to be kept.",
        { count },
      );
    case "under-range":
      return i18n.t(
        "{count, plural, one {# value} other {# values}} under the range. They have no value, and the run needs a reason to be kept.",
        { count },
      );
    case "value-missing":
      return i18n.t(
        "{count, plural, one {# value is} other {# values are}} empty from here on, and stored as missing.",
        { count },
      );
    case "hundredths-kept":
      return i18n.t("The levels have more than two decimals; hundredths are kept.");
    case "line-cut-off":
      return i18n.t("The last line is cut off, and left out: “{text}”", { text });
    case "head-repeated":
      return i18n.t("The head line stands here again, and is passed over.");
    case "foot-lines":
      return i18n.t(
        "{count, plural, one {# line} other {# lines}} at the end without a time, and left out: “{text}”",
        { count, text },
      );
    case "overlaps-history":
      return i18n.t("This instrument has a history from {from} to {to} already: {file}", {
        from: at("startsAt"),
        to: at("endsAt"),
        file: String(params.fileName),
      });
    case "overlaps-run":
      return i18n.t("This instrument has a run at that time. Import the history for that run.");
    case "run-has-history":
      return i18n.t("This run has a history already.");
    case "run-is-out":
      return i18n.t("The instrument is still out. Take it back first.");
    case "run-is-void":
      return i18n.t("This run was struck.");
    case "outside-run":
      return i18n.t("The history does not lie within the run that it was imported for.");
    case "spans-shifts":
      return i18n.t(
        "The history spans {count} shifts of the worker. It is stored for the one it covers most.",
        { count },
      );
    case "beyond-shift":
      return i18n.t(
        "The worker’s shift lasts from {from} to {to}; the history goes on beyond it. Leave out what is another worker’s.",
        { from: at("startsAt"), to: at("endsAt") },
      );
    case "outside-shift":
      return i18n.t(
        "The worker’s shift lasts from {from} to {to}; the history lies wholly outside it. Is it this worker’s, and the file’s clock right?",
        { from: String(params.from), to: String(params.to) },
      );
    case "in-the-future":
      return i18n.t("The history ends in the future, {at}. Look at the date and the clock.", {
        at: at("endsAt"),
      });
    case "workbook-broken":
      return i18n.t("The workbook is broken, or is none.");
    case "workbook-too-large":
      return i18n.t(
        "The workbook unpacks to more than {limit} MB. Save the sheet as text instead.",
        { limit: number("limitMb") },
      );
    case "workbook-has-macros":
      return i18n.t("The workbook holds macros. Save it without them.");
    case "workbook-encrypted":
      return i18n.t("The workbook is locked with a password. Save it without one.");
    case "sheet-missing":
      return i18n.t("The workbook has no sheet of that name.");
    default:
      return i18n.t("This needs another look.");
  }
}

export function dateOrderText(i18n: I18n, order: string): string {
  switch (order) {
    case "dmy":
      return i18n.t("day, month, year");
    case "mdy":
      return i18n.t("month, day, year");
    default:
      return i18n.t("year, month, day");
  }
}
