import type { I18n } from "@lingui/core";
import { formatShortDate, localDateOf } from "../format/date";
import type { Locale } from "../i18n/index";
import { isolate } from "../i18n/isolate";
import type { LetterRow, LetterState } from "../schemas/letter";

export function letterStateWord(i18n: I18n, state: LetterState): string {
  switch (state) {
    case "to-print":
      return i18n.t("To be printed");
    case "waiting":
      return i18n.t("Goes by mail");
    case "sent":
      return i18n.t("Sent, not acknowledged");
    case "failed":
      return i18n.t("Did not go: print it");
    case "acknowledged":
      return i18n.t("Acknowledged");
    case "replaced":
      return i18n.t("Replaced by a later letter");
    case "withdrawn":
      return i18n.t("Withdrawn before it went");
  }
}

/** When and how it was said that the letter was read; else when it went. */
export function letterStateNote(
  i18n: I18n,
  locale: Locale,
  { acknowledged, sentAt, noticeState, state }: LetterRow,
  timeZone: string,
): string | null {
  const on = (instant: string) => formatShortDate(localDateOf(instant, timeZone), locale);
  if (acknowledged?.way === "paper" && acknowledged.signedOn)
    return i18n.t("on paper, {date}, recorded by {name}", {
      date: formatShortDate(acknowledged.signedOn, locale),
      name: isolate(acknowledged.recordedBy ?? "–"),
    });
  if (acknowledged) return i18n.t("by the link, {date}", { date: on(acknowledged.at) });
  if (noticeState === "held") return i18n.t("held");
  if (noticeState === "bounced") return i18n.t("the mail came back");
  if (noticeState === "possibly-sent") return i18n.t("nobody knows whether it arrived");
  if (state === "sent" && sentAt) return i18n.t("on {date}", { date: on(sentAt) });
  return state === "to-print" ? i18n.t("no mail address") : null;
}
