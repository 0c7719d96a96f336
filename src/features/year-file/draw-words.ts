import type { I18n } from "@lingui/core";
import type { DrawRow, MarkWord } from "../../../shared/schemas/draw";

export function markWord(i18n: I18n, word: MarkWord | null): string {
  switch (word) {
    case "in-order":
      return i18n.t("In order");
    case "question":
      return i18n.t("Question");
    case null:
      return i18n.t("Not marked yet");
  }
}

/** How far the auditor is with a draw. */
export function drawState(i18n: I18n, { records, marked, questions }: DrawRow): string {
  const asked = i18n.t(
    "{questions, plural, =0 {no question} one {# question} other {# questions}}",
    { questions },
  );
  return marked < records
    ? i18n.t("{marked} of {records} marked, {asked}", { marked, records, asked })
    : i18n.t("all {records} marked, {asked}", { records, asked });
}
