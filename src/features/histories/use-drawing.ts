import { useEffect, useRef, useState } from "react";
import type { HistoryView } from "../../../shared/schemas/history";
import { forgetDraft, type HistoryDraft, keepDraft, readDraft } from "./history-draft";
import { areSame, type Drawn, toDrawn, toStretches } from "./history-stretches";

/**
 * What is drawn under a history and not saved yet: kept on this device through a reload, and each step can be taken back.
 */
export function useDrawing(history: HistoryView) {
  const { id } = history;
  // Somebody else's save, seen meanwhile, does not make what is drawn here a change of it.
  const [base, setBase] = useState<HistoryView>(history);
  const { revision, stretches } = base;
  const [found] = useState<HistoryDraft | null>(() => readDraft(id));
  // A draft over an earlier revision met somebody else's drawing: both are shown, neither is taken.
  const [overtaken, setOvertaken] = useState<HistoryDraft | null>(
    found && found.revision !== revision && !areSame(found.stretches, stretches) ? found : null,
  );
  const isKept =
    found !== null && found.revision === revision && !areSame(found.stretches, stretches);
  const [drawn, setDrawn] = useState<readonly Drawn[]>(() =>
    toDrawn(isKept ? found.stretches : stretches),
  );
  const [wasRestored, setWasRestored] = useState(isKept);
  const [past, setPast] = useState<readonly (readonly Drawn[])[]>([]);
  const count = useRef(0);
  /** What stood before the hand took hold, while it is still moving. */
  const held = useRef<readonly Drawn[] | null>(null);
  const isChanged = !areSame(drawn, stretches);
  if (history.revision > revision && !isChanged && !overtaken) {
    setBase(history);
    setDrawn(toDrawn(history.stretches));
    setPast([]);
  }

  useEffect(() => {
    if (overtaken) return;
    if (isChanged) keepDraft(id, { revision, stretches: toStretches(drawn) });
    else forgetDraft(id);
  }, [id, revision, drawn, isChanged, overtaken]);

  return {
    drawn,
    /** The revision that it is drawn over. */
    revision,
    isChanged,
    wasRestored,
    overtaken,
    canUndo: past.length > 0,
    newKey: () => {
      count.current += 1;
      return `new-${count.current}`;
    },
    /** `isDone` false: only a place on the way, no step of its own. */
    change: (next: readonly Drawn[], isDone = true) => {
      held.current ??= drawn;
      setDrawn(next);
      if (!isDone) return;
      const before = held.current;
      held.current = null;
      if (!areSame(before, next)) setPast((steps) => [...steps, before]);
    },
    undo: () => {
      const before = past.at(-1);
      if (!before) return;
      setPast(past.slice(0, -1));
      setDrawn(before);
    },
    /** Starts again from what is saved. */
    reset: (from: HistoryView) => {
      forgetDraft(id);
      setBase(from);
      setOvertaken(null);
      setWasRestored(false);
      setPast([]);
      setDrawn(toDrawn(from.stretches));
    },
  };
}

export type Drawing = ReturnType<typeof useDrawing>;
