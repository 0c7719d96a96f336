import { z } from "zod";
import { HistoryStretch } from "../../../shared/schemas/history";

const PREFIX = "dinward.history-draft";
const Kept = z.array(HistoryStretch);

const keyOf = (historyId: string, revision: number) => `${PREFIX}.${historyId}.${revision}`;

export interface HistoryDraft {
  /** The revision that it was drawn over. */
  readonly revision: number;
  readonly stretches: readonly HistoryStretch[];
}

/** What was drawn on this device and not saved, over whichever revision; what can't be read is none. */
export function readDraft(historyId: string): HistoryDraft | null {
  const start = `${PREFIX}.${historyId}.`;
  const key = Object.keys(localStorage).find((name) => name.startsWith(start));
  const text = key === undefined ? null : localStorage.getItem(key);
  if (key === undefined || text === null) return null;
  try {
    return {
      revision: Number(key.slice(start.length)),
      stretches: Kept.parse(JSON.parse(text)),
    };
  } catch {
    return null;
  }
}

/** One draft a history: another revision's goes. */
export function keepDraft(historyId: string, { revision, stretches }: HistoryDraft): void {
  forgetDraft(historyId);
  try {
    localStorage.setItem(keyOf(historyId, revision), JSON.stringify(stretches));
  } catch {
    // A full store is no reason to stop drawing: the page itself still has it.
  }
}

export function forgetDraft(historyId: string): void {
  for (const name of Object.keys(localStorage))
    if (name.startsWith(`${PREFIX}.${historyId}.`)) localStorage.removeItem(name);
}
