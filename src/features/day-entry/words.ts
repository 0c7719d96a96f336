import type { I18n } from "@lingui/core";
import type { MeterSettings, Unaccounted } from "../../../shared/acoustics/types";
import { formatDate } from "../../../shared/format/date";
import { formatDuration, formatMinutes } from "../../../shared/format/duration";
import { formatLevel, formatLevelChange, formatLimit } from "../../../shared/format/level";
import type { Locale } from "../../../shared/i18n/index";
import { issueText } from "../../../shared/problems/issue-text";
import type { CellFault, UnaccountedWords } from "./cells";
import type { CellId, GridColumn } from "./columns";
import type { RowIssue } from "./draft";
import type { RowProblem, RowQuestion } from "./evaluate-rows";

export const unaccountedWords = (i18n: I18n): UnaccountedWords => ({
  quiet: i18n.t("quiet"),
  likeTheRest: i18n.t("like the rest"),
  unknown: i18n.t("unknown"),
});

export function unaccountedText(i18n: I18n, value: Unaccounted, locale: Locale): string {
  const words = unaccountedWords(i18n);
  if (value.how === "quiet") return `${words.quiet} ${formatLimit(value.levelDb, locale)}`;
  return value.how === "like-the-rest" ? words.likeTheRest : words.unknown;
}

export function columnName(i18n: I18n, column: Pick<GridColumn, "id" | "task">): string {
  if (column.task) return column.task.name;
  switch (column.id) {
    case "start":
      return i18n.t("Start");
    case "length":
      return i18n.t("Length");
    case "unaccounted":
      return i18n.t("Not accounted for");
    case "sum":
      return i18n.t("Sum");
    case "reading":
      return i18n.t("Reading");
    case "protector":
      return i18n.t("Protector, by task");
    case "worn":
      return i18n.t("Worn");
    default:
      return i18n.t("Dinward works out");
  }
}

export function cellName(i18n: I18n, cell: CellId, taskName: (id: string) => string): string {
  if (cell.startsWith("task:")) return taskName(cell.slice(5));
  if (cell.startsWith("worn:")) return i18n.t("Worn in {task}", { task: taskName(cell.slice(5)) });
  return columnName(i18n, { id: cell as GridColumn["id"], task: null });
}

export function faultText(i18n: I18n, fault: CellFault): string {
  switch (fault) {
    case "ambiguous":
    case "not-a-duration":
    case "not-a-number":
    case "not-a-time":
      return issueText(i18n, { code: fault, params: {} });
    case "not-a-share":
      return i18n.t("A share lies between 0 and 100 %.");
    case "not-a-reading":
      return i18n.t("Write the level in dB, or the dose with its % sign.");
    case "not-unaccounted":
      return i18n.t("Write “quiet 70”, “like the rest” or “unknown”.");
    case "minutes-follow":
      return i18n.t(
        "These minutes follow from the length and the tasks. Write what they were: “quiet 70”, “like the rest” or “unknown”.",
      );
    case "more-than-a-day":
      return i18n.t("That is more than a day has: at most 1440 min, or 24 h.");
    case "negative":
      return i18n.t("It can’t be less than nothing.");
    case "level-out-of-range":
      return i18n.t("A level lies between 20 and 160 dB.");
  }
}

/** What the server said no with. */
function refusalText(i18n: I18n, { code, params, path }: RowIssue, locale: Locale): string {
  switch (code) {
    case "not-in-crew":
      return i18n.t("This worker was not in the crew on that day.");
    case "before-hire":
      return i18n.t("This worker was hired on {date}.", {
        date: formatDate(String(params.hiredOn), locale),
      });
    case "after-leaving":
      return i18n.t("This worker left on {date}.", {
        date: formatDate(String(params.leftOn), locale),
      });
    case "in-the-future":
      return i18n.t("This day has not begun yet.");
    case "worker-twice":
      return i18n.t("This worker stands here twice.");
    case "shifts-overlap":
      return i18n.t("It overlaps with this worker’s shift of {date}, {start}, {length}.", {
        date: formatDate(String(params.date), locale),
        start: String(params.localStart),
        length: formatDuration(Number(params.lengthMin), locale),
      });
    case "task-unknown":
      return i18n.t("This task is not of this site.");
    case "run-doubtful":
      return i18n.t(
        "This instrument had no certificate on that day. Record the run on its own page, with the reason why it is kept.",
      );
    case "shorter-than-shift":
      return i18n.t(
        "The run lasted {run} of a shift of {shift}: say under “More on this row” that it covers a part, or record it on its own page with the reason.",
        {
          run: formatDuration(Number(params.coveredMin), locale),
          shift: formatDuration(Number(params.shiftMin), locale),
        },
      );
    case "instrument-unknown":
      return i18n.t("This instrument is not known here.");
    case "worked-that-day":
      return i18n.t("A shift is saved for this day. Strike it before you mark the worker absent.");
    case "reason-missing":
      return i18n.t("A saved shift changes: say why.");
    default:
      return `${String(path.at(-1) ?? "")} ${issueText(i18n, { code, params })}`.trim();
  }
}

export interface ProblemWords {
  /** What is wrong, as short as it can be said. */
  readonly title: string;
  /** How to mend it. */
  readonly mend: string;
}

export function problemWords(
  i18n: I18n,
  problem: RowProblem,
  locale: Locale,
  taskName: (id: string) => string,
): ProblemWords {
  const name = cellName(i18n, problem.cell, taskName);
  switch (problem.kind) {
    case "fault":
      return {
        title: i18n.t("{name} can’t be read.", { name }),
        mend: faultText(i18n, problem.fault),
      };
    case "does-not-add-up": {
      const { sumMin, lengthMin, overMin, longest } = problem;
      const over = formatMinutes(overMin, locale);
      // No shift is longer than a day, so that is no way to mend it.
      const mend =
        sumMin > 1440
          ? i18n.t("Take {over} min off the tasks.", { over })
          : i18n.t("Take {over} off a task, or make the shift {length}.", {
              over,
              length: formatDuration(sumMin, locale),
            });
      const usual = longest
        ? i18n.t("{task} has never been above {longest} for this worker.", {
            task: longest.taskName,
            longest: formatMinutes(longest.longestMin, locale),
          })
        : "";
      return {
        title: i18n.t("{sum} min in a {length} min shift.", {
          sum: formatMinutes(sumMin, locale),
          length: formatMinutes(lengthMin, locale),
        }),
        mend: `${mend} ${usual}`.trim(),
      };
    }
    case "start-missing":
      return { title: i18n.t("No start."), mend: i18n.t("Write when the shift began, as 06:00.") };
    case "length-missing":
      return { title: i18n.t("No length."), mend: i18n.t("Write how long the shift was, as 8h.") };
    case "not-whole-minutes":
      return {
        title: i18n.t("Not whole minutes."),
        mend: i18n.t("A shift is as long as whole minutes; its tasks may have parts of one."),
      };
    case "length-out-of-range":
      return {
        title: i18n.t("No such length."),
        mend: i18n.t("A shift lasts from 1 minute to 24 hours."),
      };
    case "time-skipped":
      return {
        title: i18n.t("{time} did not exist.", { time: problem.time }),
        mend: i18n.t("The clock was set forward that night. Write the time that it showed."),
      };
    case "time-twice":
      return {
        title: i18n.t("{time} came twice.", { time: problem.time }),
        mend: i18n.t("The clock was set back that night. Which of the two was it?"),
      };
    case "whole-day":
      return {
        title: i18n.t("24 hours."),
        mend: i18n.t("Was the shift really as long as the whole day?"),
      };
    case "no-instrument":
      return {
        title: i18n.t("No instrument."),
        mend: i18n.t("Choose instrument and settings under “More on this row”."),
      };
    case "run-emptied":
      return {
        title: i18n.t("The run of this day is saved."),
        mend: i18n.t("Write what it read, or strike it on the run’s own page."),
      };
    case "shift-saved":
      return {
        title: i18n.t("A shift is saved for this day."),
        mend: i18n.t("Strike it on the shift’s own page, then mark the worker absent."),
      };
    case "refused":
      return {
        title: i18n.t("Not saved."),
        mend: refusalText(i18n, problem.issue, locale),
      };
  }
}

export function questionWords(i18n: I18n, question: RowQuestion, locale: Locale): ProblemWords {
  if (question.kind === "long-stay") {
    return {
      title: i18n.t("{task} {duration}?", {
        task: question.taskName,
        duration: formatDuration(question.durationMin, locale),
      }),
      mend: i18n.t("It has never been above {longest} min for this worker in a year.", {
        longest: formatMinutes(question.longestMin, locale),
      }),
    };
  }
  const { readingDb, tasksDb, tasksBound, gapDb } = question;
  const tasks = formatLevel(tasksDb, locale, tasksBound);
  return {
    title: i18n.t("Reading {level} over 8 h?", { level: formatLevel(readingDb, locale) }),
    mend:
      tasksBound === "exact"
        ? i18n.t("The tasks give {tasks}: {gap} dB.", {
            tasks,
            gap: formatLevelChange(gapDb, locale),
          })
        : i18n.t("The tasks give {tasks}: at least {gap} dB away.", {
            tasks,
            gap: formatLevel(Math.abs(gapDb), locale),
          }),
  };
}

export function settingsText(i18n: I18n, settings: MeterSettings, locale: Locale): string {
  const { exchangeRateDb, thresholdDb, criterionLevelDb, weighting, response } = settings;
  const parts = [
    i18n.t("{rate} dB", { rate: formatLimit(exchangeRateDb, locale) }),
    thresholdDb === null
      ? i18n.t("no threshold")
      : i18n.t("threshold {level}", { level: formatLimit(thresholdDb, locale) }),
    i18n.t("criterion {level}", { level: formatLimit(criterionLevelDb, locale) }),
    weighting,
  ];
  if (response !== "none") parts.push(response === "slow" ? i18n.t("slow") : i18n.t("fast"));
  return parts.join(", ");
}
