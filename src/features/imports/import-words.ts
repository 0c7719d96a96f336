import type { I18n } from "@lingui/core";
import { issueText } from "../../../shared/problems/issue-text";
import type { ImportIssue, ImportKind, ImportReport } from "../../../shared/schemas/import";

export function importKindWord(i18n: I18n, kind: ImportKind): string {
  switch (kind) {
    case "shifts":
      return i18n.t("Shifts");
    case "readings":
      return i18n.t("Readings");
    case "past-results":
      return i18n.t("Past years’ levels");
  }
}

export function importKindNote(i18n: I18n, kind: ImportKind): string {
  switch (kind) {
    case "shifts":
      return i18n.t("One line per task; lines of one worker, date and start are one shift.");
    case "readings":
      return i18n.t("One line per reading; lines of one worker, date and instrument are one run.");
    case "past-results":
      return i18n.t(
        "One line per worker and day, levels only; marked as imported, working not available.",
      );
  }
}

/** "412 shifts new, 3 changed, 20 recorded already". */
export function countsText(i18n: I18n, { kind, fresh, changed, unchanged }: ImportReport): string {
  const values = { fresh, changed, unchanged };
  switch (kind) {
    case "shifts":
      return i18n.t(
        "{fresh, plural, one {# shift} other {# shifts}} new, {changed} changed, {unchanged} recorded already",
        values,
      );
    case "readings":
      return i18n.t(
        "{fresh, plural, one {# run} other {# runs}} new, {changed} changed, {unchanged} recorded already",
        values,
      );
    case "past-results":
      return i18n.t(
        "{fresh, plural, one {# day} other {# days}} new, {changed} changed, {unchanged} recorded already",
        values,
      );
  }
}

/** What is wrong with a line, and how to mend it. */
export function importIssueText(i18n: I18n, issue: ImportIssue): string {
  const { code, params, field } = issue;
  switch (code) {
    case "column-unknown":
      return i18n.t(
        "No such column is known for this kind of file. Take it out, or take its name from the template.",
      );
    case "column-twice":
      return i18n.t("This column stands here twice. Take one of them out.");
    case "column-missing":
      return i18n.t("This column is missing. Add it as the template has it.");
    case "field-count":
      return i18n.t(
        "The line has another number of cells than the header. Look for a delimiter too many or too few.",
      );
    case "quote-broken":
      return i18n.t("A double quote is opened and not closed. Double the quotes inside a cell.");
    case "no-lines":
      return i18n.t("The file has a header and no lines.");
    case "formula-in-number":
      return i18n.t(
        "A formula or an apostrophe stands where a number belongs. Paste the value instead.",
      );
    case "number-ambiguous":
      return i18n.t("“{text}” can be read in two ways. Write it without a mark for thousands.", {
        text: params.text,
      });
    case "not-a-number":
      return i18n.t("“{text}” is not a number.", { text: params.text });
    case "not-a-date":
      return i18n.t("“{text}” is not a date. Write it as 2026-03-02.", { text: params.text });
    case "not-a-time":
      return i18n.t("“{text}” is not a time of day. Write it as 06:00.", { text: params.text });
    case "not-a-choice":
      return i18n.t("Write one of these: {choices}.", { choices: params.choices });
    case "worker-unknown":
      return i18n.t(
        "Nobody at this site has that employee number. Look at the number, or enter the worker first.",
      );
    case "task-unknown":
      return i18n.t(
        "The site has no task of that name. Write it letter by letter, or add the task first.",
      );
    case "job-unknown":
      return i18n.t(
        "The site has no job of that name. Write it letter by letter, or leave the cell empty.",
      );
    case "empty":
      return i18n.t("This cell has to be filled in.");
    case "first-day-needed":
      return i18n.t("Nobody here has this number. Whoever is new needs the first day.");
    case "crew-day-needed":
      return i18n.t("It is another crew than before. Say from which day.");
    case "worker-of-another-site":
      return i18n.t("Somebody of another site has this number, and that site is not yours.");
    case "left-already":
      return i18n.t(
        "By the record this worker has left. Take the line out, or change the last day on the worker’s own page.",
      );
    case "crew-later-already":
      return i18n.t(
        "This worker has a membership from that day on or later. Change it on the crew’s own page.",
      );
    case "crew-unknown":
      return i18n.t(
        "The site has no crew of that name. Write it letter by letter, or leave the cell empty.",
      );
    case "instrument-unknown":
      return i18n.t("No instrument has that serial number. Add it to the register first.");
    case "shift-unknown":
      return i18n.t("No shift of that day starts then. Import the shift first.");
    case "day-twice":
      return i18n.t("Line {line} is about the same worker and day. Keep one of them.", {
        line: params.line,
      });
    case "day-computed-already":
      return i18n.t(
        "This day was computed here from its shifts; a level from a file never replaces it. Take the line out.",
      );
    case "reading-recorded-already":
      return i18n.t("This run is recorded, with other figures. Correct it on its own page.");
    case "differs-within-run":
    case "differs-within-shift":
      return i18n.t(
        "This differs from line {line}, which is about the same one. It has to be the same in all its lines.",
        { line: params.line },
      );
    case "only-where-quiet":
      return i18n.t("A level belongs here only where the time not accounted for was quiet.");
    case "rule-set-not-in-force":
      return i18n.t("{key} was not in force on {date}, or is no rule set.", {
        key: params.key,
        date: params.date,
      });
    case "in-the-future":
    case "date-in-future":
      return i18n.t("This day lies ahead.");
    case "time-skipped":
      return i18n.t("The clock was set forward over this time: it never came.");
    case "time-twice":
      return i18n.t("The clock showed this time twice. Write first or second under which_hour.");
    case "open-end-unconfirmed":
      return i18n.t(
        "The end of this shift, {time}, still lies ahead: write yes under open_end if it will end so.",
        { time: params.time },
      );
    case "whole-day-unconfirmed":
      return i18n.t("A shift of exactly 24 hours: write yes under whole_day if it was one.");
    case "shifts-overlap":
      return i18n.t("The worker has another shift at that time.");
    case "not-in-crew":
      return i18n.t("The worker is not in that crew on that day.");
    case "reading-empty":
      return i18n.t("The line has settings and no reading.");
    case "field-check-mistyped":
      return i18n.t("A field check looks mistyped. Mend it, or say why the run is kept.");
    case "calibration-out-of-date":
    case "calibration-failed":
      return i18n.t("The instrument had no certificate on that day. Say why the run is kept.");
    case "field-check-drift":
      return i18n.t(
        "The field checks drifted by more than 0.5 dB. Say under kept_reason why the run is kept, or take it out.",
      );
    default:
      return issueText(i18n, { code, params: field === "" ? params : { ...params } });
  }
}
