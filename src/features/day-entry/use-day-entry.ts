import { useMutation } from "@tanstack/react-query";
import { useCallback, useEffect, useMemo, useRef, useState } from "react";
import type { DayGridView, GridRow } from "../../../shared/schemas/shift";
import { ApiError, newChangeKey } from "../../lib/api";
import { settleSame } from "./conflicts";
import {
  type DayDraft,
  type DraftAction,
  isBehind,
  isSettled,
  openDay,
  type RowDraft,
  rebaseDraft,
  reduceDraft,
} from "./draft";
import { type DraftStore, type PendingSave, restoreDraft } from "./draft-store";
import {
  createRowEvaluator,
  type EvaluateRow,
  type RowEvaluation,
  usualSetup,
} from "./evaluate-rows";
import { fetchDay, saveDay } from "./queries";
import { type Collected, collectRows, countRows, draftAfter, viewAfter } from "./save";

const KEEP_AFTER_MS = 250;
const STEPS_BACK = 50;

export interface SaveOutcome {
  readonly saved: number;
  readonly waiting: number;
  /** Place of the first row that waits, if any. */
  readonly firstWaiting: number | null;
  /** A row that met somebody else's revision: what stands has to be chosen. */
  readonly conflict: string | null;
}

/** What was asked before saving, and the answers. */
export interface SaveAnswers {
  readonly reason: string | null;
  readonly confirmsOpenEnd: boolean;
}

/** Shifts that are not over yet. */
export interface OpenEnds {
  readonly openEnds: readonly string[];
}

/** The drafts that can be gone back to, the last one first to be taken. */
export type StepsBack = readonly DayDraft[];

export interface DayEntryState {
  readonly view: DayGridView;
  readonly draft: DayDraft;
  readonly found: readonly RowEvaluation[];
  readonly evaluate: EvaluateRow;
  readonly dispatch: (action: DraftAction) => void;
  /** Takes back the last change: a paste, a fill, a typed cell. */
  readonly undo: () => void;
  /** Where a cell begins to be written: its typing is a step of its own, which `abandon` forgets. */
  readonly beginStep: () => StepsBack;
  /** Puts a row back as it was when a step began, as if nothing had been typed since. */
  readonly abandon: (row: RowDraft, begun: StepsBack) => void;
  /** When the draft that was restored had been kept; null where none was. */
  readonly restoredAt: string | null;
  readonly dropDraft: () => void;
  /** Workers whose shift somebody else has saved since this draft began. */
  readonly behind: readonly string[];
  readonly isSaving: boolean;
  readonly saveError: unknown;
  /**
   * Resolves to "reason" where saved shifts change and nobody has said why, and to the workers whose shift ends in the
   * future where nobody has confirmed that.
   */
  readonly save: (
    answers: SaveAnswers,
  ) => Promise<SaveOutcome | OpenEnds | "reason" | "nothing" | "failed">;
}

/** The request's outcome is not known: it may have been stored, and has to go again under the same key. */
const isOutcomeOpen = (error: unknown) =>
  !(error instanceof ApiError) || error.status === 0 || error.status >= 500;

/** What is typed for a crew's day: kept on this device at every change, evaluated row by row, saved in one request. */
export function useDayEntry(
  view: DayGridView,
  store: DraftStore,
  onView: (view: DayGridView) => void,
): DayEntryState {
  const [stored] = useState(() => store.read());
  const [draft, setDraft] = useState(() => {
    const opened = openDay(view);
    return stored ? restoreDraft(opened, stored) : opened;
  });
  const [restoredAt, setRestoredAt] = useState(
    stored && stored.rows.length > 0 ? stored.keptAt : null,
  );
  const past = useRef<StepsBack>([]);
  const pending = useRef<PendingSave | null>(stored?.pending ?? null);
  const latest = useRef({ draft, view });
  latest.current = { draft, view };

  const seenView = useRef(view);
  useEffect(() => {
    if (seenView.current === view) return;
    seenView.current = view;
    setDraft((known) => settleSame(rebaseDraft(known, view), view));
  }, [view]);

  useEffect(() => {
    const keep = () => store.write(draft, pending.current);
    const timer = setTimeout(keep, KEEP_AFTER_MS);
    window.addEventListener("pagehide", keep);
    return () => {
      clearTimeout(timer);
      window.removeEventListener("pagehide", keep);
    };
  }, [draft, store]);
  // Leaving for another page of the application is faster than the timer.
  useEffect(() => () => store.write(latest.current.draft, pending.current), [store]);

  const evaluate = useMemo(() => createRowEvaluator(view), [view]);
  const found = useMemo(() => draft.rows.map(evaluate), [draft.rows, evaluate]);

  const lastTyped = useRef("");
  const show = useCallback((next: DayDraft) => {
    latest.current = { ...latest.current, draft: next };
    setDraft(next);
  }, []);
  const dispatch = useCallback(
    (action: DraftAction) => {
      const { draft: known, view: now } = latest.current;
      const next = reduceDraft(known, withSetup(action, known, now));
      if (next === known) return;
      const [only] =
        action.type === "set-cells" && action.changes.length === 1 ? action.changes : [];
      const typed = only ? `${only.workerId} ${only.cell}` : "";
      // Letter by letter in one cell is one step back.
      if (typed === "" || typed !== lastTyped.current) {
        past.current = [...past.current.slice(-STEPS_BACK), known];
      }
      lastTyped.current = typed;
      show(next);
    },
    [show],
  );
  const undo = useCallback(() => {
    const before = past.current.at(-1);
    past.current = past.current.slice(0, -1);
    lastTyped.current = "";
    if (before) show(before);
  }, [show]);
  const beginStep = useCallback(() => {
    lastTyped.current = "";
    return past.current;
  }, []);
  const abandon = useCallback(
    (row: RowDraft, begun: StepsBack) => {
      past.current = begun;
      lastTyped.current = "";
      show(reduceDraft(latest.current.draft, { type: "restore-row", row }));
    },
    [show],
  );

  const mutation = useMutation({
    mutationFn: ({ collected, sent }: { collected: Collected; sent: PendingSave }) => {
      const body = { date: latest.current.view.date, rows: collected.rows };
      return saveDay(view.crew.id, body, sent.key);
    },
  });

  async function save({ reason, confirmsOpenEnd }: SaveAnswers) {
    // What was chosen a moment ago is not drawn yet, and belongs to it all the same.
    const { draft, view } = latest.current;
    const collected = collectRows(draft, view, evaluate, reason, confirmsOpenEnd);
    if (collected.corrections.length > 0 && reason === null) return "reason" as const;
    if (collected.openEnds.length > 0 && !confirmsOpenEnd) return { openEnds: collected.openEnds };
    if (collected.rows.length === 0) {
      if (collected.unchanged.length === 0) return "nothing" as const;
      const next = draftAfter(draft, view, { saved: [], refused: [], conflicts: [] }, collected);
      setDraft(next);
      return outcome(0, next, view);
    }
    const body = JSON.stringify(collected.rows);
    // The same rows again are the same change, whatever became of the first request.
    const sent: PendingSave =
      pending.current?.body === body ? pending.current : { key: newChangeKey(), body };
    pending.current = sent;
    store.write(draft, sent);
    try {
      const reply = await mutation.mutateAsync({ collected, sent });
      pending.current = null;
      past.current = [];
      const isMet = reply.conflicts.length > 0;
      const anew = isMet ? await dayAnew(latest.current.view) : latest.current.view;
      const after = viewAfter(anew, reply, collected.rows);
      const answered = draftAfter(latest.current.draft, after, reply, collected);
      const next = isMet ? settleSame(rebaseDraft(answered, after), after) : answered;
      const stillBehind = behindIn(next, after);
      seenView.current = after;
      setDraft(next);
      setRestoredAt(null);
      store.write(next, null);
      onView(after);
      const savedWorkers = new Set(reply.saved.map(({ workerId }) => workerId));
      return {
        ...outcome(savedWorkers.size, next, after),
        conflict:
          reply.conflicts.find(({ workerId }) => stillBehind.includes(workerId))?.workerId ?? null,
      };
    } catch (error) {
      if (!isOutcomeOpen(error)) pending.current = null;
      store.write(latest.current.draft, pending.current);
      return "failed" as const;
    }
  }

  const behind = behindIn(draft, view);

  return {
    view,
    draft,
    found,
    evaluate,
    dispatch,
    undo,
    beginStep,
    abandon,
    restoredAt,
    dropDraft() {
      pending.current = null;
      setRestoredAt(null);
      setDraft(openDay(view));
    },
    behind,
    isSaving: mutation.isPending,
    saveError: mutation.error,
    save,
  };
}

/** Who met somebody else's saving has missed others too: the day as it stands now, or what is known if it can't be had. */
async function dayAnew(view: DayGridView): Promise<DayGridView> {
  try {
    return await fetchDay(view.crew.id, view.date);
  } catch {
    return view;
  }
}

function behindIn(draft: DayDraft, view: DayGridView): string[] {
  const gridRows = new Map(view.rows.map((row) => [row.worker.id, row]));
  return draft.rows.flatMap((row) => {
    const gridRow = gridRows.get(row.workerId);
    return gridRow && isBehind(row, gridRow) ? [row.workerId] : [];
  });
}

/** A reading typed into a cell is taken under the settings of the last one, until somebody says otherwise. */
function withSetup(action: DraftAction, draft: DayDraft, view: DayGridView): DraftAction {
  if (action.type !== "set-cells" || !action.changes.some(({ cell }) => cell === "reading")) {
    return action;
  }
  const setup = usualSetup(view, draft.rows);
  const rows = draft.rows.map((row) =>
    row.runSetup === null &&
    action.changes.some(({ cell, workerId }) => cell === "reading" && workerId === row.workerId)
      ? { ...row, runSetup: setup }
      : row,
  );
  return { type: "replace", draft: reduceDraft({ ...draft, rows }, action) };
}

function outcome(saved: number, draft: DayDraft, view: DayGridView): SaveOutcome {
  const gridRows = new Map<string, GridRow>(view.rows.map((row) => [row.worker.id, row]));
  const first = draft.rows.findIndex((row) => {
    const gridRow = gridRows.get(row.workerId);
    return gridRow !== undefined && !isSettled(row, gridRow);
  });
  return {
    saved,
    waiting: countRows(draft, view).waiting,
    firstWaiting: first === -1 ? null : first,
    conflict: null,
  };
}
