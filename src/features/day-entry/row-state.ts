import type { GridRow } from "../../../shared/schemas/shift";
import { isElsewhere, isSettled, isSpoken, type RowDraft } from "./draft";
import type { RowEvaluation } from "./evaluate-rows";

/** Where a row stands between roster and server. */
export type RowState =
  | "saved"
  /** The day stands with another shift. */
  | "elsewhere"
  | "ready"
  | "not-confirmed"
  | "does-not-add-up"
  | "has-fault"
  | "asks"
  | "refused"
  | "behind";

export function rowState(found: RowEvaluation, gridRow: GridRow, isBehind: boolean): RowState {
  const { row, problems, questions } = found;
  if (isElsewhere(row, gridRow)) return "elsewhere";
  if (isSettled(row, gridRow)) return "saved";
  if (isBehind) return "behind";
  if (problems.some(({ kind }) => kind === "refused")) return "refused";
  if (problems.some(({ kind }) => kind === "does-not-add-up")) return "does-not-add-up";
  if (problems.length > 0) return "has-fault";
  if (!isSpoken(row, gridRow)) return "not-confirmed";
  return questions.length > 0 ? "asks" : "ready";
}

export type WaitingState = Exclude<RowState, "saved" | "elsewhere">;

export const isWaiting = (state: RowState): state is WaitingState =>
  state !== "saved" && state !== "elsewhere";

/** Filled in from roster and nominal day, in order, and nobody has said anything about it yet. */
export const isOnlyFilledIn = (found: RowEvaluation, row: RowDraft, gridRow: GridRow): boolean =>
  !isSettled(row, gridRow) && !isSpoken(row, gridRow) && found.problems.length === 0;
