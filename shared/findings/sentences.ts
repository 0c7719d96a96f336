import type { I18n } from "@lingui/core";
import type { ProtectorWord } from "../acoustics/types";
import { formatDate } from "../format/date";
import { formatDose } from "../format/dose";
import { formatDuration } from "../format/duration";
import { formatLevel, formatLevelChange, formatLimit } from "../format/level";
import type { Locale } from "../i18n/index";
import type { FindingKind, FindingRow } from "../schemas/finding";
import { levelWithBasis } from "./basis";
import {
  type FindingFacts,
  factsToday,
  leftOf,
  numberOf,
  remedyOf,
  remedyWords,
  tasksOf,
  textOf,
} from "./facts";

/** What a worker's protectors ask for: one order, whichever finding of the day it stands on. Null where nothing is known. */
function protectorOrder(i18n: I18n, facts: FindingFacts): string | null {
  const remedy = remedyOf(facts);
  if (remedy) return i18n.t("Give {protector}", { protector: remedyWords(i18n, remedy) });
  const left = leftOf(facts);
  if (!left) return null;
  const { kind, taskName: task } = left;
  switch (kind) {
    case "wear-throughout":
      return task
        ? i18n.t("Ask why it came off at {task}", { task })
        : i18n.t("Ask why it came off");
    case "lower-noise":
      return task
        ? i18n.t("Lower the noise in {task} first: no protector of the register is enough", {
            task,
          })
        : i18n.t("Lower the noise first: no protector of the register is enough");
    case "shorten-time":
      return task
        ? i18n.t(
            "Shorten the time in {task} or lower its noise first: no protector of the register is enough for the day",
            { task },
          )
        : i18n.t(
            "Shorten the time in noise or lower it first: no protector of the register is enough for the day",
          );
    case "other-protector":
      return task
        ? i18n.t("Find another protector for {task}: none of the register takes the right amount", {
            task,
          })
        : i18n.t("Find another protector: none of the register takes the right amount");
  }
}

/**
 * What a supervisor or an officer has to do, as one order without a full stop: "Give Fenmuff and Sedge band", "Double up
 * in the test cell".
 */
export function orderSentence(
  i18n: I18n,
  _locale: Locale,
  kind: FindingKind,
  facts: FindingFacts,
): string {
  const task = tasksOf(i18n, facts);
  const order = protectorOrder(i18n, facts);
  switch (kind) {
    case "over-limit-outside":
      return i18n.t("Bring the noise down, or the time in it");
    case "over-limit-at-ear":
      return (
        order ??
        i18n.t("Find protectors that are enough in each task, or shorten the time in noise")
      );
    case "protects-too-little":
      return (
        order ??
        (task
          ? i18n.t("Find a stronger protector for {task}", { task })
          : i18n.t("Find a stronger protector"))
      );
    case "protects-too-much":
      return (
        order ??
        (task
          ? i18n.t("Find a lighter protector for {task}", { task })
          : i18n.t("Find a lighter protector"))
      );
    case "dual-protection":
      return (
        order ??
        (task
          ? i18n.t("Double up in {task}: a plug under a muff", { task })
          : i18n.t("Double up: a plug under a muff"))
      );
    case "no-protector":
      return (
        order ??
        (task ? i18n.t("Find a protector for {task}", { task }) : i18n.t("Find a protector"))
      );
    case "not-worn-long-enough":
      if (facts.isExpected === true)
        return task
          ? i18n.t("See that it stays on the whole time in {task}", { task })
          : i18n.t("See that it stays on the whole time in noise");
      return task
        ? i18n.t("Ask why it came off at {task}", { task })
        : i18n.t("Ask why it came off");
    case "wearing-unknown":
      return task
        ? i18n.t("Watch how long it is worn in {task}", { task })
        : i18n.t("Watch how long it is worn");
    case "peak-or-ceiling":
      return textOf(facts, "what") === "ceiling"
        ? i18n.t("Find what was so loud, and bring it down")
        : i18n.t("Find the impact, and damp it");
    case "reading-gap":
      return i18n.t("Compare the reading with the tasks; one of them is wrong");
    case "time-not-accounted":
      return i18n.t("Ask what was done in the missing time");
    case "reading-missing":
      return i18n.t("Add a reading under the rule’s own settings");
    case "instrument":
      return textOf(facts, "calibrationFailedOn")
        ? i18n.t("Look at what was measured with it")
        : i18n.t("Book the calibration");
    case "problem-reported":
      return i18n.t("Talk to the worker about it");
    case "fit-failed":
      return textOf(facts, "protector")
        ? i18n.t("Fit {protector} anew, or try another", {
            protector: textOf(facts, "protector") ?? "",
          })
        : i18n.t("Fit it anew, or try another");
    case "fit-due":
      return i18n.t("Test the fit");
  }
}

/** The order of a finding that the usual day, as things stand now, no longer shows. */
const inOrderSentence = (i18n: I18n): string =>
  i18n.t("See that the next day is in order, then close it");

/** A level at the ear with the word for what is worn: "79.7, Good"; null where the level is not known. */
function atEarFigure(
  locale: Locale,
  { atEarDb, word }: { readonly atEarDb: number | null; readonly word: ProtectorWord | null },
  wordText: (word: ProtectorWord) => string,
): string | null {
  if (atEarDb === null) return null;
  const level = formatLevel(atEarDb, locale);
  return word ? `${level}, ${wordText(word)}` : level;
}

/** What the ordered remedy would bring: "79.7, Good"; null where none is proposed or its figure is not known. */
export function remedyFigure(
  locale: Locale,
  facts: FindingFacts,
  wordText: (word: ProtectorWord) => string,
): string | null {
  const remedy = remedyOf(facts);
  return remedy && atEarFigure(locale, remedy, wordText);
}

/** What a finding asks for as things stand now, and the level at the ear: of the remedy, or of the usual day as it is. */
export function orderToday(
  i18n: I18n,
  locale: Locale,
  finding: Pick<FindingRow, "kind" | "facts" | "today">,
  wordText: (word: ProtectorWord) => string,
): { readonly order: string; readonly figure: string | null } {
  const { kind, today } = finding;
  if (today?.is === "in-order")
    return { order: inOrderSentence(i18n), figure: atEarFigure(locale, today, wordText) };
  const facts = factsToday(finding);
  return {
    order: orderSentence(i18n, locale, kind, facts),
    figure: remedyFigure(locale, facts, wordText),
  };
}

/** What the program noticed, for officers and supervisors, without a full stop. */
export function noticedSentence(
  i18n: I18n,
  locale: Locale,
  kind: FindingKind,
  facts: FindingFacts,
): string {
  const task = tasksOf(i18n, facts) ?? i18n.t("noise");
  const protector = textOf(facts, "protector") ?? i18n.t("The protector");
  const levelDb = numberOf(facts, "levelDb");
  const dosePct = numberOf(facts, "dosePct");
  const valueDb = numberOf(facts, "valueDb");
  const level = (name: string) => formatLevel(numberOf(facts, name), locale);
  switch (kind) {
    case "over-limit-outside":
      if (levelDb !== null && valueDb !== null)
        return i18n.t("{level} without protection, limit {limit}", {
          level: levelWithBasis(i18n, locale, levelDb, facts),
          limit: formatLimit(valueDb, locale),
        });
      return dosePct !== null
        ? i18n.t("A dose of {dose} without protection", { dose: formatDose(dosePct, locale) })
        : i18n.t("More noise without protection than the limit allows");
    case "over-limit-at-ear":
      if (levelDb !== null && valueDb !== null)
        return i18n.t("{level} at the ear, limit {limit}", {
          level: formatLevel(levelDb, locale),
          limit: formatLimit(valueDb, locale),
        });
      return dosePct !== null
        ? i18n.t("A dose of {dose} at the ear", { dose: formatDose(dosePct, locale) })
        : i18n.t("More at the ear than the limit allows");
    case "protects-too-little":
    case "protects-too-much":
      return i18n.t("{protector}: {level} in {task} while worn", {
        protector,
        level: level("wornDb"),
        task,
      });
    case "dual-protection":
      return dosePct !== null
        ? i18n.t("A dose of {dose} asks for two protectors", { dose: formatDose(dosePct, locale) })
        : i18n.t("The noise asks for two protectors");
    case "no-protector":
      return numberOf(facts, "outsideDb") === null
        ? i18n.t("Works in noise with no protector assigned")
        : i18n.t("Works in {task}, {level}, with no protector assigned", {
            task,
            level: level("outsideDb"),
          });
    case "not-worn-long-enough": {
      const offMin = numberOf(facts, "offMin");
      if (facts.isExpected === true && offMin !== null && levelDb !== null) {
        const values = {
          duration: formatDuration(offMin, locale),
          task,
          level: formatLevel(levelDb, locale),
        };
        return valueDb === null
          ? i18n.t(
              "Enough while worn; by the wearing time known it is off for {duration} in {task}: {level} at the ear",
              values,
            )
          : i18n.t(
              "Enough while worn; by the wearing time known it is off for {duration} in {task}: {level} at the ear, limit {limit}",
              { ...values, limit: formatLimit(valueDb, locale) },
            );
      }
      return offMin === null
        ? i18n.t("Enough while worn, but off for a part of {task}", { task })
        : i18n.t("Enough while worn, but off for {duration} in {task}", {
            duration: formatDuration(offMin, locale),
            task,
          });
    }
    case "wearing-unknown":
      return i18n.t("Nobody has said how long it is worn in {task}", { task });
    case "peak-or-ceiling": {
      const values = {
        level: formatLevel(levelDb, locale),
        limit: valueDb === null ? "–" : formatLimit(valueDb, locale),
      };
      if (textOf(facts, "what") === "ceiling")
        return i18n.t("Maximum {level} dB, ceiling {limit}", values);
      const weighting = textOf(facts, "weighting");
      if (textOf(facts, "what") === "action-peak")
        return weighting === null
          ? i18n.t("Peak {level} dB, action value {limit}", values)
          : i18n.t("Peak {level} dB({weighting}), action value {limit}", { ...values, weighting });
      return weighting === null
        ? i18n.t("Peak {level} dB, limit {limit}", values)
        : i18n.t("Peak {level} dB({weighting}), limit {limit}", { ...values, weighting });
    }
    case "reading-gap":
      return i18n.t("The reading is {gap} dB from the tasks’ {level}", {
        gap: formatLevelChange(numberOf(facts, "gapDb"), locale),
        level: level("tasksDb"),
      });
    case "time-not-accounted": {
      const min = numberOf(facts, "unaccountedMin");
      return min === null
        ? i18n.t("A part of the shift is not accounted for")
        : i18n.t("{duration} of the shift are not accounted for", {
            duration: formatDuration(min, locale),
          });
    }
    case "reading-missing":
      return i18n.t("No reading or level serves this criterion exactly");
    case "instrument": {
      const runs = numberOf(facts, "runsCount");
      if (textOf(facts, "calibrationFailedOn") === null)
        return i18n.t("Its laboratory calibration runs out");
      return i18n.t(
        "It failed its laboratory calibration; {runs, plural, =0 {no run} one {# run} other {# runs}} since its last good check",
        { runs: runs ?? 0 },
      );
    }
    case "problem-reported": {
      const text = textOf(facts, "text");
      return text ? i18n.t("“{text}”", { text }) : i18n.t("The worker reported a problem");
    }
    case "fit-failed": {
      const needDb = numberOf(facts, "needDb");
      const parDb = numberOf(facts, "parDb");
      return needDb === null || parDb === null
        ? i18n.t("{protector} does not fit well enough", { protector })
        : i18n.t("{protector} takes {par} dB off on this worker, {need} are needed", {
            protector,
            par: formatLevel(parDb, locale),
            need: formatLevel(needDb, locale),
          });
    }
    case "fit-due": {
      const testedOn = textOf(facts, "testedOn");
      return testedOn === null
        ? i18n.t("The fit of {protector} was never tested", { protector })
        : i18n.t("The fit of {protector} was last tested on {date}", {
            protector,
            date: formatDate(testedOn, locale),
          });
    }
  }
}
