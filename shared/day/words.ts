import type { I18n } from "@lingui/core";
import type { Verdict as VerdictCode, ProtectorWord as WordCode } from "../acoustics/types";

/** The word of a verdict against a criterion. */
export function verdictWord(i18n: I18n, verdict: VerdictCode): string {
  switch (verdict) {
    case "under":
      return i18n.t("Under");
    case "over":
      return i18n.t("Over");
    case "cant-tell-yet":
      return i18n.t("Can’t tell yet");
    case "not-assessed":
      return i18n.t("Not assessed");
  }
}

/** The word of a protector while it is worn. */
export function protectorWordText(i18n: I18n, word: WordCode): string {
  switch (word) {
    case "too-little":
      return i18n.t("Too little");
    case "just-enough":
      return i18n.t("Just enough");
    case "good":
      return i18n.t("Good");
    case "strong-side":
      return i18n.t("On the strong side");
    case "too-much":
      return i18n.t("Too much");
    case "enough":
      return i18n.t("Enough");
  }
}
