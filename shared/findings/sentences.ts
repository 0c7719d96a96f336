import type { I18n } from "@lingui/core";
import type { ProtectorWord } from "../acoustics/types";
import { formatDose } from "../format/dose";
import { formatDuration } from "../format/duration";
import { formatLevel, formatLevelChange, formatLimit, formatWholeLevel } from "../format/level";
import type { Locale } from "../i18n/index";
import type { FindingKind } from "../schemas/finding";

/** What a finding stores beside its kind: codes, names and numbers. An older finding may lack any of them. */
export type FindingFacts = Readonly<Record<string, unknown>>;

/** The protector that the program proposes, as the facts keep it. */
export interface ProposedRemedy {
  readonly modelIds: readonly string[];
  readonly names: readonly string[];
  readonly atEarDb: number | null;
  readonly word: ProtectorWord | null;
}

const textOf = (facts: FindingFacts, name: string): string | null => {
  const value = facts[name];
  return typeof value === "string" && value !== "" ? value : null;
};

const numberOf = (facts: FindingFacts, name: string): number | null => {
  const value = facts[name];
  return typeof value === "number" && Number.isFinite(value) ? value : null;
};

const textsIn = (value: unknown): string[] =>
  Array.isArray(value) ? value.filter((one): one is string => typeof one === "string") : [];

export function remedyOf(facts: FindingFacts): ProposedRemedy | null {
  const remedy = facts.remedy;
  if (typeof remedy !== "object" || remedy === null) return null;
  const { names, modelIds, atEarDb, word } = remedy as Record<string, unknown>;
  const found = textsIn(names);
  if (found.length === 0) return null;
  return {
    names: found,
    modelIds: textsIn(modelIds),
    atEarDb: typeof atEarDb === "number" ? atEarDb : null,
    word: typeof word === "string" ? (word as ProtectorWord) : null,
  };
}

/** "Fenmuff", "Fenmuff and Sedge band". */
export function protectorNames(i18n: I18n, names: readonly string[]): string {
  const [first = "", second] = names;
  return second === undefined ? first : i18n.t("{first} and {second}", { first, second });
}

const giveRemedy = (i18n: I18n, remedy: ProposedRemedy): string =>
  i18n.t("Give {protector}", { protector: protectorNames(i18n, remedy.names) });

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
  const remedy = remedyOf(facts);
  const task = textOf(facts, "taskName");
  switch (kind) {
    case "over-limit-outside":
      return i18n.t("Bring the noise down, or the time in it");
    case "over-limit-at-ear":
      return remedy
        ? giveRemedy(i18n, remedy)
        : i18n.t("Shorten the time in noise; no one protector of the register fits the day");
    case "protects-too-little":
      if (remedy) return giveRemedy(i18n, remedy);
      return task
        ? i18n.t("Find a stronger protector for {task}", { task })
        : i18n.t("Find a stronger protector");
    case "protects-too-much":
      if (remedy)
        return task
          ? i18n.t("Give {protector} for {task}", {
              protector: protectorNames(i18n, remedy.names),
              task,
            })
          : giveRemedy(i18n, remedy);
      return task
        ? i18n.t("Find a lighter protector for {task}", { task })
        : i18n.t("Find a lighter protector");
    case "dual-protection":
      if (remedy && remedy.names.length > 1) return giveRemedy(i18n, remedy);
      return task
        ? i18n.t("Double up in {task}: a plug under a muff", { task })
        : i18n.t("Double up: a plug under a muff");
    case "no-protector":
      if (remedy) return giveRemedy(i18n, remedy);
      return task ? i18n.t("Find a protector for {task}", { task }) : i18n.t("Find a protector");
    case "not-worn-long-enough":
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
      return i18n.t("Book the calibration");
    case "problem-reported":
      return i18n.t("Talk to the worker about it");
  }
}

/** What the ordered remedy would bring: "79.7, Good"; null where none is proposed or its figure is not known. */
export function remedyFigure(
  locale: Locale,
  facts: FindingFacts,
  wordText: (word: ProtectorWord) => string,
): string | null {
  const remedy = remedyOf(facts);
  if (!remedy || remedy.atEarDb === null) return null;
  const level = formatLevel(remedy.atEarDb, locale);
  return remedy.word ? `${level}, ${wordText(remedy.word)}` : level;
}

/** What the program noticed, for officers and supervisors, without a full stop. */
export function noticedSentence(
  i18n: I18n,
  locale: Locale,
  kind: FindingKind,
  facts: FindingFacts,
): string {
  const task = textOf(facts, "taskName") ?? i18n.t("noise");
  const protector = textOf(facts, "protector") ?? i18n.t("The protector");
  const levelDb = numberOf(facts, "levelDb");
  const dosePct = numberOf(facts, "dosePct");
  const valueDb = numberOf(facts, "valueDb");
  const level = (name: string) => formatLevel(numberOf(facts, name), locale);
  switch (kind) {
    case "over-limit-outside":
      if (levelDb !== null && valueDb !== null)
        return i18n.t("{level} without protection, limit {limit}", {
          level: formatLevel(levelDb, locale),
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
      return textOf(facts, "what") === "ceiling"
        ? i18n.t("Maximum {level} dB, ceiling {limit}", values)
        : i18n.t("Peak {level} dB, limit {limit}", values);
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
    case "instrument":
      return i18n.t("Its laboratory calibration runs out");
    case "problem-reported": {
      const text = textOf(facts, "text");
      return text ? i18n.t("“{text}”", { text }) : i18n.t("The worker reported a problem");
    }
  }
}

/** What to do, to the worker, in plain words and whole sentences. No word of the trade, no decimals. */
export function workerSentence(
  i18n: I18n,
  locale: Locale,
  kind: FindingKind,
  facts: FindingFacts,
): string {
  const remedy = remedyOf(facts);
  const task = textOf(facts, "taskName");
  const protector = textOf(facts, "protector");
  const ask = remedy
    ? i18n.t("Ask your supervisor for {protector}.", {
        protector: protectorNames(i18n, remedy.names),
      })
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
      return i18n.t(
        "There was a very loud bang or noise. Tell your supervisor where it comes from.",
      );
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
