import type { I18n } from "@lingui/core";
import { formatLimit, formatWholeLevel } from "../format/level";
import type { Locale } from "../i18n/index";
import type { FindingKind } from "../schemas/finding";
import {
  type FindingFacts,
  handoutsOf,
  leftOf,
  listWords,
  numberOf,
  type ProposedRemedy,
  remedyOf,
  remedyWords,
  textOf,
} from "./facts";

/** Whom to ask for what. What is proposed for everywhere leaves out where another was given since. */
function askFor(i18n: I18n, remedy: ProposedRemedy, givenFor: readonly string[]): string {
  const ask = i18n.t("Ask your supervisor for {protector}.", {
    protector: remedyWords(i18n, remedy),
  });
  const [first] = handoutsOf(remedy);
  return givenFor.length === 0 || first.taskNames.length > 0
    ? ask
    : `${ask} ${i18n.t("That is for noise outside {tasks}.", { tasks: listWords(i18n, givenFor) })}`;
}

/**
 * What to do, to the worker, in plain words and whole sentences. No word of the trade, no decimals. `givenFor`: tasks and
 * areas for which another protector was given since.
 */
export function workerSentence(
  i18n: I18n,
  locale: Locale,
  kind: FindingKind,
  facts: FindingFacts,
  givenFor: readonly string[] = [],
): string {
  const remedy = remedyOf(facts);
  const task = textOf(facts, "taskName");
  const protector = textOf(facts, "protector");
  const ask = remedy
    ? askFor(i18n, remedy, givenFor)
    : leftOf(facts)?.kind === "wear-throughout"
      ? i18n.t("Keep your protector on all the time in noise.")
      : i18n.t("Ask your supervisor what to do before you work in noise again.");
  switch (kind) {
    case "over-limit-outside":
      return i18n.t(
        "It is very loud where you work. Keep your protector on all the time in noise.",
      );
    case "over-limit-at-ear": {
      const levelDb = numberOf(facts, "levelDb");
      return levelDb === null
        ? i18n.t("Too much noise reached your ear. {ask}", { ask })
        : i18n.t("About {level} decibels reached your ear; that is too much. {ask}", {
            level: formatWholeLevel(levelDb, locale),
            ask,
          });
    }
    case "protects-too-little":
      return protector
        ? i18n.t("{protector} protects too little for your work. {ask}", { protector, ask })
        : i18n.t("Your protector protects too little for your work. {ask}", { ask });
    case "protects-too-much":
      return protector
        ? i18n.t("{protector} protects too much: you might miss a warning. {ask}", {
            protector,
            ask,
          })
        : i18n.t("Your protector protects too much: you might miss a warning. {ask}", { ask });
    case "dual-protection":
      return task
        ? i18n.t("Wear two protectors in {task}: plugs, and a muff over them.", { task })
        : i18n.t("Wear two protectors: plugs, and a muff over them.");
    case "no-protector":
      return i18n.t("You work in noise and have no protector yet. {ask}", { ask });
    case "not-worn-long-enough":
      return task
        ? i18n.t("Keep your protector on the whole time in {task}. It was off for too long.", {
            task,
          })
        : i18n.t("Keep your protector on the whole time in noise. It was off for too long.");
    case "wearing-unknown":
      return i18n.t("Tell your supervisor how long you wear your protector.");
    case "peak-or-ceiling":
      return peakSentence(i18n, locale, facts);
    case "fit-failed":
      return protector
        ? i18n.t("{protector} does not fit you well enough. Ask your supervisor to fit it anew.", {
            protector,
          })
        : i18n.t("Your protector does not fit you well enough. Ask for it to be fitted anew.");
    case "fit-due":
      return i18n.t("Your protector’s fit is to be tested. Your supervisor will tell you when.");
    case "time-not-accounted":
      return i18n.t(
        "Tell your supervisor what you did in the time that is missing from your shift.",
      );
    case "reading-gap":
    case "reading-missing":
    case "instrument":
      return i18n.t("You need not do anything. Your safety officer is looking into a measurement.");
    case "problem-reported":
      return i18n.t("Your safety officer has your report and will talk to you.");
  }
}

/** A bang or a moment of noise over its own limit, in whole decibels. */
function peakSentence(i18n: I18n, locale: Locale, facts: FindingFacts): string {
  const levelDb = numberOf(facts, "levelDb");
  const valueDb = numberOf(facts, "valueDb");
  if (levelDb === null || valueDb === null)
    return i18n.t("There was a very loud bang or noise. Tell your supervisor where it comes from.");
  const level = formatWholeLevel(levelDb, locale);
  const limit = formatLimit(valueDb, locale);
  if (textOf(facts, "what") === "action-peak")
    return i18n.t(
      "There was a bang of about {level} decibels. Keep your protector on wherever there are such bangs.",
      { level },
    );
  const isCeiling = textOf(facts, "what") === "ceiling";
  if (level === limit)
    return isCeiling
      ? i18n.t(
          "For a moment there were a little more than {limit} decibels; no more than {limit} is allowed. Tell your supervisor where they come from.",
          { limit },
        )
      : i18n.t(
          "There was a bang of a little more than {limit} decibels; no more than {limit} is allowed. Tell your supervisor where it comes from.",
          { limit },
        );
  return isCeiling
    ? i18n.t(
        "For a moment there were about {level} decibels; no more than {limit} is allowed. Tell your supervisor where they come from.",
        { level, limit },
      )
    : i18n.t(
        "There was a bang of about {level} decibels; no more than {limit} is allowed. Tell your supervisor where it comes from.",
        { level, limit },
      );
}
