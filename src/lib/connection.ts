import type { QueryClient } from "@tanstack/react-query";
import { useEffect, useState } from "react";
import { api, type ConnectionState, connectionEvents, isUnreached } from "./api";

/** Whether the server was reached last; what is asked and sent says it. */
export function useConnection(): ConnectionState {
  const [state, setState] = useState<ConnectionState>(connectionEvents.now);
  useEffect(() => connectionEvents.subscribe(setState), []);
  return state;
}

const FIRST_WAIT_MS = 1_000;
const LONGEST_WAIT_MS = 10_000;
const GROWTH = 1.5;

const isAway = () => {
  const state = connectionEvents.now();
  return state === "offline" || state === "unavailable";
};

/** Anybody may ask it, and it needs the database; the answer itself is of no interest. */
const ask = () =>
  api.get("/session", { schema: { parse: () => null }, asksWhoIsThere: true }).catch(() => null);

/**
 * While the server can't be reached, asks for it again and again, less and less often, and at once when the browser has a
 * network again or the page is looked at. Then what could not be fetched meanwhile is fetched. A page that nobody looks at
 * asks nothing.
 *
 * @returns what ends it
 */
export function watchConnection(client: QueryClient): () => void {
  let timer: ReturnType<typeof setTimeout> | undefined;
  let waitMs = FIRST_WAIT_MS;
  let wasAway = false;
  let isAsking = false;
  let backAt = Number.NEGATIVE_INFINITY;

  function plan() {
    clearTimeout(timer);
    if (document.visibilityState === "hidden") return;
    timer = setTimeout(probe, waitMs);
    waitMs = Math.min(waitMs * GROWTH, LONGEST_WAIT_MS);
  }

  async function probe() {
    clearTimeout(timer);
    if (isAsking || !isAway()) return;
    isAsking = true;
    await ask();
    isAsking = false;
    if (isAway()) plan();
  }

  function probeNow() {
    if (document.visibilityState === "hidden" || !isAway()) return;
    waitMs = FIRST_WAIT_MS;
    void probe();
  }

  const unsubscribe = connectionEvents.subscribe((state) => {
    if (isAway()) {
      // One address that breaks while all else answers is not to be asked every second.
      if (!wasAway && Date.now() - backAt > LONGEST_WAIT_MS) waitMs = FIRST_WAIT_MS;
      if (!wasAway) plan();
      wasAway = true;
      return;
    }
    clearTimeout(timer);
    if (!wasAway) return;
    wasAway = false;
    backAt = Date.now();
    if (state === "ok")
      void client.refetchQueries({
        type: "active",
        predicate: ({ state: { status, error } }) => status === "error" && isUnreached(error),
      });
  });
  window.addEventListener("online", probeNow);
  document.addEventListener("visibilitychange", probeNow);
  return () => {
    clearTimeout(timer);
    unsubscribe();
    window.removeEventListener("online", probeNow);
    document.removeEventListener("visibilitychange", probeNow);
  };
}
