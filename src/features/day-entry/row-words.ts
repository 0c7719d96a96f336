import type { I18n } from "@lingui/core";
import type { RowState, WaitingState } from "./row-state";

/** Rows of one kind that are named one by one; more are counted. */
const NAMED_ROWS = 2;
/** What needs somebody comes first. */
const ORDER: readonly WaitingState[] = [
  "behind",
  "refused",
  "does-not-add-up",
  "has-fault",
  "asks",
  "not-confirmed",
  "ready",
];

/** "row 6 does not add up", "9 rows are not confirmed": what the rows wait for. */
export function waitingSentences(i18n: I18n, states: readonly RowState[]): string[] {
  return ORDER.flatMap((state) => {
    const rows = states.flatMap((one, at) => (one === state ? [at + 1] : []));
    if (rows.length > NAMED_ROWS) return [manySentence(i18n, state, rows.length)];
    return rows.map((row) => oneSentence(i18n, state, row));
  });
}

function oneSentence(i18n: I18n, state: WaitingState, row: number): string {
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
      return i18n.t("row {row} is ready to be saved", { row });
  }
}

function manySentence(i18n: I18n, state: WaitingState, count: number): string {
  switch (state) {
    case "does-not-add-up":
      return i18n.t("{count} rows do not add up", { count });
    case "has-fault":
      return i18n.t("{count} rows need another look", { count });
    case "asks":
      return i18n.t("{count} rows ask something", { count });
    case "refused":
      return i18n.t("{count} rows were not taken", { count });
    case "behind":
      return i18n.t("{count} rows were saved by somebody else", { count });
    case "not-confirmed":
      return i18n.t("{count} rows are not confirmed", { count });
    case "ready":
      return i18n.t("{count} rows are ready to be saved", { count });
  }
}

/** The word beside the number. */
export function rowStateWord(i18n: I18n, state: RowState, isTyping: boolean): string {
  if (isTyping) return i18n.t("typing");
  if (state === "saved") return i18n.t("saved");
  if (state === "elsewhere") return i18n.t("elsewhere");
  return state === "ready" ? i18n.t("not saved") : i18n.t("waits");
}
