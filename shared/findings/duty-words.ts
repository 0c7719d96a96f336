import type { I18n } from "@lingui/core";
import type { DutyItem, DutyKind } from "../schemas/duty";
import { findingWord } from "./words";

/** A kind of duty, as it stands in lists and in a calendar. */
export function dutyKindWord(i18n: I18n, kind: DutyKind): string {
  switch (kind) {
    case "finding":
      return i18n.t("Finding");
    case "measure":
      return i18n.t("Measure");
    case "notice":
      return i18n.t("Letter of results");
    case "monitoring":
      return i18n.t("Measure anew after a change");
    case "calibration":
      return i18n.t("Calibration");
    case "fit-test":
      return i18n.t("Fit test");
    case "cushions":
      return i18n.t("Cushions, tips");
    case "training":
      return i18n.t("Training");
  }
}

/** What is to be done, without whom: a finding by its own word. */
export const dutyWord = (i18n: I18n, { kind, findingKind }: DutyItem): string =>
  kind === "finding" && findingKind ? findingWord(i18n, findingKind) : dutyKindWord(i18n, kind);
