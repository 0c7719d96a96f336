import type { I18n } from "@lingui/core";
import type { NoticeState } from "../schemas/notice";

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
