import type { I18n } from "@lingui/core";
import type { z } from "zod";
import { formatShortDate } from "../format/date";
import { formatDuration } from "../format/duration";
import type { Locale } from "../i18n/index";
import type { BudgetView } from "../schemas/group";
import type {
  MeasuringReason,
  RISK_FACTORS,
  Strategy,
  SurveySample,
  SurveyState,
  TargetResult,
} from "../schemas/survey";
import type { WorkplaceChangeView } from "../schemas/workplace-change";

type State = z.infer<typeof SurveyState>;

export function strategyTitle(i18n: I18n, strategy: Strategy): string {
  switch (strategy) {
    case "task":
      return i18n.t("Task by task");
    case "job":
      return i18n.t("By job");
    case "full-day":
      return i18n.t("By full days");
  }
}

/** What a strategy is, in a line beside its choice. */
export function strategyNote(i18n: I18n, strategy: Strategy): string {
  switch (strategy) {
    case "task":
      return i18n.t("Each task is sampled for itself; the nominal day puts them together.");
    case "job":
      return i18n.t("Samples at any time of the work, spread over the group and the shift.");
    case "full-day":
      return i18n.t("Whole shifts on a few members of the group.");
  }
}

/** Why a strategy is preselected: the pattern of work that is on record. */
export function patternWords(i18n: I18n, pattern: string): string {
  switch (pattern) {
    case "fixed-simple":
      return i18n.t("the group works at one place, in one task");
    case "fixed-complex":
      return i18n.t("the group works at one place, in several tasks");
    case "mobile-few-tasks":
      return i18n.t("the group moves about, with few tasks whose times are known");
    case "mobile-many-tasks":
      return i18n.t("the group moves about, with many tasks");
    case "mobile-unpredictable":
      return i18n.t("the group moves about, and its days can’t be foreseen");
    case "tasks-without-durations":
      return i18n.t("nobody has said how long its tasks take");
    default:
      return i18n.t("its nominal day names no task");
  }
}

export const NOISE_PATTERNS = ["steady", "cyclic", "fluctuating"] as const;

/** How the noise of a task runs, which decides how long its samples last. */
export function noisePatternWord(i18n: I18n, pattern: (typeof NOISE_PATTERNS)[number]): string {
  switch (pattern) {
    case "steady":
      return i18n.t("steady noise");
    case "cyclic":
      return i18n.t("noise in cycles");
    case "fluctuating":
      return i18n.t("noise that fluctuates");
  }
}

export function stateTitle(i18n: I18n, state: State): string {
  switch (state) {
    case "planned":
      return i18n.t("Planned");
    case "measuring":
      return i18n.t("Being measured");
    case "done":
      return i18n.t("Done");
    case "struck":
      return i18n.t("Struck");
  }
}

/** What the standard asks for, as the reasons of a plan. */
export function planReason(i18n: I18n, code: string): string {
  switch (code) {
    case "three-samples":
      return i18n.t("three samples at least");
    case "whole-short-task":
      return i18n.t("the whole of so short a task");
    case "five-minutes":
      return i18n.t("5 min each at least");
    case "whole-cycles":
      return i18n.t("whole cycles, three or more");
    case "longer-for-fluctuating":
      return i18n.t("longer, for the noise fluctuates");
    case "large-spread":
      return i18n.t("more, for they lie 3 dB apart or further");
    case "group-size":
      return i18n.t("total time by the size of the group");
    case "split-large-group":
      return i18n.t("more than 40 workers: 17 h, or divide the group");
    case "five-samples":
      return i18n.t("five samples at least");
    case "spread-over-shift":
      return i18n.t("spread over workers and shift");
    case "three-days":
      return i18n.t("three days at least");
    case "whole-day":
      return i18n.t("the whole shift, or as much of it as can be");
    default:
      return code;
  }
}

/** What the standard asks for next, after the samples that are there. */
export function nextWords(
  i18n: I18n,
  { asksFor, missingCount }: Pick<TargetResult, "asksFor" | "missingCount">,
): string {
  switch (asksFor) {
    case null:
      return i18n.t("enough");
    case "plan-anew":
      return i18n.t("They scatter by more than 3.5 dB: plan anew, or divide the group");
    case "large-spread":
      return i18n.t(
        "They lie 3 dB apart or further: {count, plural, one {# more sample} other {# more samples}}",
        { count: missingCount },
      );
    case "more-samples":
      return i18n.t("{count, plural, one {# more sample} other {# more samples}}", {
        count: missingCount,
      });
  }
}

export function notCountedWords(i18n: I18n, why: NonNullable<SurveySample["notCounted"]>): string {
  switch (why) {
    case "still-out":
      return i18n.t("Still out");
    case "refused":
      return i18n.t("Refused: keep it with a reason, or take another");
    case "no-laeq":
      return i18n.t("No energy mean: a 5 dB average can’t be a sample");
    case "of-no-target":
      return i18n.t("It belongs to none of this survey’s tasks; draw them under its time history");
  }
}

export function riskFactorTitle(i18n: I18n, factor: (typeof RISK_FACTORS)[number]): string {
  switch (factor) {
    case "impulse":
      return i18n.t("Impulsive noise");
    case "vibration":
      return i18n.t("Vibration along with the noise");
    case "ototoxic-substances":
      return i18n.t("Ototoxic substances");
    case "warning-signals":
      return i18n.t("Warning signals that must be heard");
  }
}

export function changeKindTitle(i18n: I18n, kind: WorkplaceChangeView["kind"] | string): string {
  switch (kind) {
    case "process":
      return i18n.t("Process");
    case "machine":
      return i18n.t("Machine");
    case "control":
      return i18n.t("Noise control");
    case "work-pattern":
      return i18n.t("Pattern of work");
    default:
      return kind;
  }
}

/** A reason why a group wants measuring: what it is, then the facts of it. */
export function needWords(
  i18n: I18n,
  reason: MeasuringReason,
  locale: Locale,
): { title: string; facts: string } {
  switch (reason.code) {
    case "never-measured":
      return { title: i18n.t("Never measured"), facts: reason.taskNames.join(", ") };
    case "measured-too-long-ago":
      return {
        title: i18n.t("Measured too long ago"),
        facts: i18n.t("on {date}, due again on {due}", {
          date: formatShortDate(reason.measuredOn, locale),
          due: formatShortDate(reason.dueOn, locale),
        }),
      };
    case "changed-since":
      return {
        title: i18n.t("Changed since"),
        facts: [
          i18n.t("{kind}, {date}: {what}", {
            kind: changeKindTitle(i18n, reason.kind),
            date: formatShortDate(reason.happenedOn, locale),
            what: reason.what,
          }),
          ...(reason.assignmentsCount > 0
            ? [
                i18n.t(
                  "{count, plural, one {# protector was} other {# protectors were}} chosen before it",
                  { count: reason.assignmentsCount },
                ),
              ]
            : []),
        ].join("; "),
      };
    case "undecided":
      return {
        title: i18n.t("Undecided verdicts"),
        facts: i18n.t(
          "{days, plural, one {# day} other {# days}} of {workers, plural, one {# worker} other {# workers}} Can’t tell yet in the last 90 days",
          { days: reason.daysCount, workers: reason.workersCount },
        ),
      };
    case "doubtful-instrument":
      return {
        title: i18n.t("Instrument in doubt"),
        facts: i18n.t(
          "{serial} failed its calibration; {count, plural, one {# run} other {# runs}} with it",
          { serial: reason.serialNumber, count: reason.runsCount },
        ),
      };
  }
}

/** "3 × 5 min". */
export const samplesOfLength = (
  i18n: I18n,
  { samplesCount, sampleMin }: { samplesCount: number; sampleMin: number },
  locale: Locale,
): string =>
  i18n.t("{count} × {length}", {
    count: samplesCount,
    length: formatDuration(sampleMin, locale),
  });

/** Where a part of the uncertainty comes from. */
export function sourceWord(i18n: I18n, source: BudgetView["items"][number]["source"]): string {
  switch (source) {
    case "sampling":
      return i18n.t("sampling");
    case "duration":
      return i18n.t("duration");
    case "instrument":
      return i18n.t("instrument");
    case "position":
      return i18n.t("microphone position");
  }
}

/** Why there is no uncertainty, with the tasks that lack what it takes. */
export function noBudgetWords(i18n: I18n, reason: string, tasks: string): string {
  switch (reason) {
    case "no-tasks":
      return i18n.t("The nominal day names no task.");
    case "mixed-strategies":
      return i18n.t(
        "Its levels were measured by different strategies, and the standard has no sum for that.",
      );
    case "not-an-energy-level":
      return i18n.t("No energy level: {tasks}. A 5 dB average has no uncertainty by ISO 9612.", {
        tasks,
      });
    case "too-few-samples":
      return tasks === ""
        ? i18n.t("Too few samples: three at least.")
        : i18n.t("Too few samples: {tasks}.", { tasks });
    default:
      return tasks === ""
        ? i18n.t("Nobody has said what it was measured with.")
        : i18n.t("Nobody has said what it was measured with: {tasks}.", { tasks });
  }
}
