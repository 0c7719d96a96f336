import type { I18n } from "@lingui/core";
import type { RowState } from "./row-state";

/** "row 6 does not add up". */
export function rowStateSentence(i18n: I18n, state: RowState, row: number): string | null {
  switch (state) {
    case "does-not-add-up":
      return i18n.t("row {row} does not add up", { row });
    case "has-fault":
      return i18n.t("row {row} needs another look", { row });
    case "asks":
      return i18n.t("row {row} asks something", { row });
    case "refused":
      return i18n.t("row {row} was not taken", { row });
    case "behind":
      return i18n.t("row {row} was saved by somebody else", { row });
    case "not-confirmed":
      return i18n.t("row {row} is not confirmed", { row });
    case "ready":
      return i18n.t("row {row} is typed", { row });
    case "saved":
      return null;
  }
}

/** The word beside the number. */
export function rowStateWord(i18n: I18n, state: RowState, isTyping: boolean): string {
  if (isTyping) return i18n.t("typing");
  if (state === "saved") return i18n.t("saved");
  return state === "ready" ? i18n.t("not saved") : i18n.t("waits");
}
