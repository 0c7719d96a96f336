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

/** What was said, in the words of the answers where it was one of them. */
export function saidWords(i18n: I18n, said: Said): string {
  const answer = answerOf(said);
  return answer
    ? answerWord(i18n, answer)
    : i18n.t("{worn} of {seen} times", { worn: said.wornCount, seen: said.seenCount });
}
