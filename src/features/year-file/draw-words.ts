import type { I18n } from "@lingui/core";
import type { DrawRow, MarkWord } from "../../../shared/schemas/draw";
import type { NoticeState } from "../../../shared/schemas/notice";

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

/** How far somebody was told. */
export function toldWord(i18n: I18n, state: NoticeState): string {
  switch (state) {
    case "waiting":
      return i18n.t("will be told");
    case "held":
      return i18n.t("held");
    case "sending":
      return i18n.t("is being sent");
    case "sent":
      return i18n.t("was told");
    case "possibly-sent":
      return i18n.t("possibly sent");
    case "failed":
      return i18n.t("not sent");
    case "bounced":
      return i18n.t("came back undeliverable");
    case "on-paper":
      return i18n.t("was told on paper or in person");
    case "withdrawn":
      return i18n.t("withdrawn");
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
