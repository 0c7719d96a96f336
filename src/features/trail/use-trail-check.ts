import { useCallback, useEffect, useRef, useState } from "react";
import type {
  RowsChecked,
  SealFault,
  SealsChecked,
  TrailState,
} from "../../../shared/schemas/trail-check";
import { api } from "../../lib/api";
import { ownReply } from "../../lib/own-reply";

export interface CheckedSoFar {
  state: TrailState;
  seals: { checked: number; erased: number; faults: readonly SealFault[]; isDone: boolean };
  /** By table; one that is missing waits its turn. */
  tables: ReadonlyMap<string, RowsChecked>;
  isDone: boolean;
}

/**
 * The check, piece by piece: the chain in stretches, then every table, so that it shows how far it is and no request takes
 * long. Leaving the page ends it.
 */
export function useTrailCheck() {
  const [found, setFound] = useState<CheckedSoFar | null>(null);
  const [error, setError] = useState<unknown>(null);
  const [isRunning, setIsRunning] = useState(false);
  const running = useRef<AbortController | null>(null);
  useEffect(() => () => running.current?.abort(), []);

  const start = useCallback(async (state: TrailState) => {
    running.current?.abort();
    const controller = new AbortController();
    running.current = controller;
    const { signal } = controller;
    setError(null);
    setIsRunning(true);
    let so: CheckedSoFar = {
      state,
      seals: { checked: 0, erased: 0, faults: [], isDone: false },
      tables: new Map(),
      isDone: false,
    };
    const tell = (more: Partial<CheckedSoFar>) => {
      so = { ...so, ...more };
      if (!signal.aborted) setFound(so);
    };
    tell({});
    try {
      for (let after: number | null = 0; after !== null; ) {
        const part: SealsChecked = await api.get("/trail-check/seals", {
          query: { after },
          schema: ownReply<SealsChecked>("checked", "next", "faults"),
          signal,
        });
        after = part.next;
        tell({
          seals: {
            checked: so.seals.checked + part.checked,
            erased: so.seals.erased + part.erased,
            faults: [...so.seals.faults, ...part.faults],
            isDone: after === null,
          },
        });
      }
      for (const table of state.tables) {
        const rows = await api.get(`/trail-check/rows/${table}`, {
          schema: ownReply<RowsChecked>("rows", "faultCount", "faults"),
          signal,
        });
        tell({ tables: new Map([...so.tables, [table, rows]]) });
      }
      tell({ isDone: true });
    } catch (failure) {
      if (!signal.aborted) setError(failure);
    } finally {
      if (!signal.aborted) setIsRunning(false);
    }
  }, []);

  return { found, error, isRunning, start };
}
