import type { I18n } from "@lingui/core";
import type { z } from "zod";
import type { GapKind } from "../schemas/waiting";

type Gap = z.infer<typeof GapKind>;

const ALL: Readonly<Record<Gap, true>> = {
  "not-measured": true,
  "no-protector": true,
  "not-fitted": true,
  "not-trained": true,
  "letter-late": true,
  "notice-late": true,
  "notice-not-sent": true,
  "not-assessed": true,
};
/** In the order of the page. */
export const GAPS = Object.keys(ALL) as readonly Gap[];

export function gapWord(i18n: I18n, kind: Gap): string {
  switch (kind) {
    case "not-measured":
      return i18n.t("In noise but not measured");
    case "no-protector":
      return i18n.t("No protector where one is required");
    case "not-fitted":
      return i18n.t("Fit not tested");
    case "not-trained":
      return i18n.t("Not trained");
    case "letter-late":
      return i18n.t("Letters of results unsent or late");
    case "notice-late":
      return i18n.t("Notices late");
    case "notice-not-sent":
      return i18n.t("Notices not sent");
    case "not-assessed":
      return i18n.t("Days not assessed");
  }
}

/** What is counted; `hasNoInterval`: of fit tests, at a site that states none. */
export function gapMeaning(i18n: I18n, kind: Gap, hasNoInterval = false): string {
  switch (kind) {
    case "not-measured":
      return i18n.t("people over 80 dB by a task’s level or an estimate, with no run of their own");
    case "no-protector":
      return i18n.t("people whose finding is open");
    case "not-fitted":
      return hasNoInterval
        ? i18n.t(
            "no interval stated; people in noise with a protector, and never a fit test with what they wear",
          )
        : i18n.t("people in noise with a protector, and no fit test within the site’s interval");
    case "letter-late":
      return i18n.t("sent after the rule’s days, or not at all");
    case "not-trained":
      return i18n.t("people to whom the rules owe training, and none within their interval");
    case "notice-late":
      return i18n.t("somebody was told after more than a day");
    case "notice-not-sent":
      return i18n.t("refused, held, overdue, or nobody knows");
    case "not-assessed":
      return i18n.t("no verdict on a line that the rules judge");
  }
}
