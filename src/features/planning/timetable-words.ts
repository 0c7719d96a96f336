import type { I18n } from "@lingui/core";
import { formatDose } from "../../../shared/format/dose";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel } from "../../../shared/format/level";
import type { Locale } from "../../../shared/i18n/index";
import { isolate } from "../../../shared/i18n/isolate";
import { clockAt, SLOT_MIN } from "../../../shared/planning/timetable";
import type {
  TimetableBasis,
  TimetableDemand,
  TimetableFound,
  TimetableInput,
} from "../../../shared/schemas/timetable";

/** A task's sign in a table: A, B, C. More than 26 are not asked for. */
export const taskSign = (task: number): string => String.fromCharCode(65 + task);

export const slotTime = (startsAt: string, slot: number): string =>
  clockAt(startsAt, slot * SLOT_MIN);

/** Up to this gap, in percent of the limit, a better timetable would not look like one. */
const NO_GAP_PCT = 0.05;

/** How good a timetable is, and how good any could be. */
export function goodnessSentence(
  i18n: I18n,
  locale: Locale,
  { largestPct, boundPct }: Pick<TimetableFound, "largestPct" | "boundPct">,
): string {
  return largestPct - boundPct < NO_GAP_PCT
    ? i18n.t("Largest dose {largest} of the limit: proved to be the smallest that can be.", {
        largest: formatDose(largestPct, locale),
      })
    : i18n.t("Largest dose {largest} of the limit; no timetable can be below {bound}.", {
        largest: formatDose(largestPct, locale),
        bound: formatDose(boundPct, locale),
      });
}

/** Time at none of the tasks, in words. */
export function restWord(i18n: I18n, locale: Locale, rest: TimetableBasis["rest"]): string {
  return rest.name ?? i18n.t("in quiet, {level} dB", { level: formatLevel(rest.levelDb, locale) });
}

/** One of the things that were asked, as a sentence. */
export function demandSentence(
  i18n: I18n,
  locale: Locale,
  demand: TimetableDemand,
  { request, basis }: { request: TimetableInput; basis: TimetableBasis },
): string {
  if (demand.kind === "limit")
    return demand.people.length === basis.people.length
      ? i18n.t("Nobody takes more than {most} of the limit.", {
          most: formatDose(request.mostPct, locale),
        })
      : i18n.t("None of these takes more than {most} of the limit: {names}.", {
          most: formatDose(request.mostPct, locale),
          names: demand.people.map((person) => isolate(basis.people[person]!.name)).join(", "),
        });
  const asked = request.tasks[demand.task]!;
  const task = isolate(basis.tasks[demand.task]!.name);
  const time = (slots: number | null) => formatDuration((slots ?? 0) * SLOT_MIN, locale);
  switch (demand.kind) {
    case "staffing": {
      const { from, to, people } = [...asked.staffing].sort((a, b) => a.from - b.from)[
        demand.line
      ]!;
      return i18n.t(
        "{task} takes {count, plural, one {# person} other {# people}} from {from} to {to}.",
        {
          task,
          count: people,
          from: slotTime(request.startsAt, from),
          to: slotTime(request.startsAt, to),
        },
      );
    }
    case "qualified": {
      const may = basis.people.filter(
        ({ id }, person) =>
          basis.tasks[demand.task]!.slotPct[person] !== null &&
          (asked.qualifiedIds?.includes(id) ?? true),
      );
      return i18n.t("{task} may be done only by {names}.", {
        task,
        names: may.map(({ name }) => isolate(name)).join(", "),
      });
    }
    case "stay":
      return i18n.t("Nobody stays at {task} for longer than {time} in one go.", {
        task,
        time: time(asked.longestStay),
      });
    case "total":
      return i18n.t("Nobody does {task} for longer than {time} in a day.", {
        task,
        time: time(asked.longestTotal),
      });
  }
}
