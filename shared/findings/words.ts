import type { I18n } from "@lingui/core";
import type { FindingKind, FindingState } from "../schemas/finding";

/** A finding in the words of the trade, as it stands in lists. */
export function findingWord(i18n: I18n, kind: FindingKind): string {
  switch (kind) {
    case "over-limit-outside":
      return i18n.t("Over the limit without protection");
    case "over-limit-at-ear":
      return i18n.t("Over the limit");
    case "protects-too-little":
      return i18n.t("Protects too little");
    case "protects-too-much":
      return i18n.t("Protects too much");
    case "dual-protection":
      return i18n.t("Two protectors needed");
    case "no-protector":
      return i18n.t("No protector");
    case "not-worn-long-enough":
      return i18n.t("Not worn long enough");
    case "wearing-unknown":
      return i18n.t("Wearing time not known");
    case "peak-or-ceiling":
      return i18n.t("Peak, ceiling");
    case "reading-gap":
      return i18n.t("Reading and tasks disagree");
    case "time-not-accounted":
      return i18n.t("Time not accounted for");
    case "reading-missing":
      return i18n.t("Reading missing");
    case "instrument":
      return i18n.t("Instrument");
    case "problem-reported":
      return i18n.t("Problem reported");
    case "fit-failed":
      return i18n.t("Does not fit");
    case "fit-due":
      return i18n.t("Fit test due");
  }
}

export function findingStateWord(i18n: I18n, state: FindingState): string {
  switch (state) {
    case "new":
      return i18n.t("New");
    case "in-hand":
      return i18n.t("In hand");
    case "done":
      return i18n.t("Done, to be checked");
    case "closed":
      return i18n.t("Closed");
    case "came-back":
      return i18n.t("Came back");
  }
}
