import type { ProtectorWord } from "../types";
import { isPast } from "../verdict";

/**
 * EN 458's word for a level at the ear while worn, against the action value it hangs from. Bands of 5 dB: over the
 * value too little, then just enough, good, on the strong side, and more than 15 dB below it too much. The good band
 * keeps both its ends.
 *
 * @source en-458 Annex A
 */
export function en458Word(wornDb: number, actionValueDb: number): ProtectorWord {
  if (isPast(wornDb, actionValueDb, "exceeds")) return "too-little";
  if (isPast(wornDb, actionValueDb - 5, "exceeds")) return "just-enough";
  if (isPast(wornDb, actionValueDb - 10, "reaches")) return "good";
  return isPast(wornDb, actionValueDb - 15, "reaches") ? "strong-side" : "too-much";
}

/** Levels at the ear while worn that a protector should bring about, dB. */
export interface TargetBand {
  readonly lowDb: number;
  readonly highDb: number;
  readonly goodLowDb: number;
  readonly goodHighDb: number;
}

/**
 * From 15 dB under the action value up to it; its good part 10 to 5 dB under.
 *
 * @source en-458 Annex A
 */
export function bandBelow(actionDb: number): TargetBand {
  return {
    lowDb: actionDb - 15,
    goodLowDb: actionDb - 10,
    goodHighDb: actionDb - 5,
    highDb: actionDb,
  };
}

/**
 * Whether a protector brings the shift's level at the ear down to its target.
 *
 * @source osha-1910.95 App. B and (j)(2), (j)(3)
 */
export function appendixBWord(atEarDb: number, targetDb: number): ProtectorWord {
  return isPast(atEarDb, targetDb, "exceeds") ? "too-little" : "enough";
}

const ORDER: readonly ProtectorWord[] = ["too-little", "too-much"];

/**
 * The task whose word is the day's: too little first (the loudest of them), then too much (the quietest), else the
 * task that is loudest while worn. Undefined where no task has a word.
 */
export function decidingTask<
  T extends { readonly word: ProtectorWord | null; readonly wornDb: number | null },
>(tasks: readonly T[]): T | undefined {
  let deciding: T | undefined;
  for (const task of tasks) {
    if (task.word === null || task.wornDb === null) continue;
    if (!deciding || isAhead(task, deciding)) deciding = task;
  }
  return deciding;
}

type Worded = { readonly word: ProtectorWord | null; readonly wornDb: number | null };

function isAhead(task: Worded, other: Worded): boolean {
  const rank = rankOf(task.word);
  const otherRank = rankOf(other.word);
  if (rank !== otherRank) return rank < otherRank;
  return task.word === "too-much" ? task.wornDb! < other.wornDb! : task.wornDb! > other.wornDb!;
}

function rankOf(word: ProtectorWord | null): number {
  const rank = ORDER.indexOf(word!);
  return rank < 0 ? ORDER.length : rank;
}
