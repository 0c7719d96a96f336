import type { I18n } from "@lingui/core";

/** What somebody can say of themselves, as worn of this many looks: no memory is finer than quarters. */
export const ANSWER_LOOKS = 4;
export const WORN_OF_ANSWER = { always: 4, mostly: 3, half: 2, seldom: 1, never: 0 } as const;

export const ANSWERS = ["always", "mostly", "half", "seldom", "never"] as const;
export type Answer = (typeof ANSWERS)[number];

interface Said {
  readonly wornCount: number;
  readonly seenCount: number;
}

/** The answer that was given; null where the report counts otherwise, as one that was tapped on a round does. */
export const answerOf = ({ wornCount, seenCount }: Said): Answer | null =>
  seenCount === ANSWER_LOOKS
    ? (ANSWERS.find((answer) => WORN_OF_ANSWER[answer] === wornCount) ?? null)
    : null;

export function answerWord(i18n: I18n, answer: Answer): string {
  switch (answer) {
    case "always":
      return i18n.t("All the time");
    case "mostly":
      return i18n.t("Most of the time");
    case "half":
      return i18n.t("About half of the time");
    case "seldom":
      return i18n.t("Now and then");
    case "never":
      return i18n.t("Not at all");
  }
}

/** A share that the day's own record states, percent; null: it states none. */
interface Stated {
  readonly statedPct: number | null;
}
export const isStated = ({ statedPct }: Stated): boolean => statedPct !== null;
const WHOLE_PCT = 99.95;

/** What becomes of a worker's word on tasks for which the day's own record states how long; null where it states none. */
export function keptBesideWords(
  i18n: I18n,
  tasks: readonly (Stated & { readonly name: string })[],
): string | null {
  const stated = tasks.filter(isStated);
  if (stated.length === 0) return null;
  if (stated.length < tasks.length)
    return i18n.t(
      "For {tasks} it is written down how long you wore it that day, and that counts. What you say of it is kept beside that, and your safety officer sees it.",
      { tasks: stated.map(({ name }) => name).join(", ") },
    );
  return stated.every(({ statedPct }) => (statedPct ?? 0) >= WHOLE_PCT)
    ? i18n.t(
        "It is written down for this day that you wore it the whole time, and that counts. What you say here is kept beside it, and your safety officer sees it.",
      )
    : i18n.t(
        "It is written down for this day how long you wore it, and that counts. What you say here is kept beside it, and your safety officer sees it.",
      );
}

/** More than so many points below what is written down, what was said is told beside the figure that rests on the record. */
const CLEARLY_LESS_POINTS = 10;
export const isClearlyLess = ({ wornCount, seenCount, statedPct }: Said & Stated): boolean =>
  statedPct !== null && statedPct - (100 * wornCount) / seenCount > CLEARLY_LESS_POINTS;

/** What was said, in the words of the answers where it was one of them. */
export function saidWords(i18n: I18n, said: Said): string {
  const answer = answerOf(said);
  return answer
    ? answerWord(i18n, answer)
    : i18n.t("{worn} of {seen} times", { worn: said.wornCount, seen: said.seenCount });
}
