import { useEffect, useRef, useState } from "react";
import type { RuleSetVersion } from "../../../shared/acoustics/types";
import {
  type Fewest,
  fewestChanges,
  type TriedWorker,
  type TryContext,
} from "../../../shared/planning/try-changes";
import type { PlanChange } from "../../../shared/schemas/plan";

/** As long as a page may stand still, ms. */
const SLICE_MS = 12;

type Search =
  | { state: "idle" }
  | { state: "searching"; done: number; of: number }
  | { state: "found"; found: Fewest };

/** Searches for the fewest changes in slices, so that the page stays alive, shows how far it is, and can stop it. */
export function useFewest() {
  const [search, setSearch] = useState<Search>({ state: "idle" });
  const timer = useRef<ReturnType<typeof setTimeout> | undefined>(undefined);
  const stop = () => {
    clearTimeout(timer.current);
    setSearch({ state: "idle" });
  };
  useEffect(() => () => clearTimeout(timer.current), []);
  const start = (
    workers: readonly TriedWorker[],
    changes: readonly PlanChange[],
    context: TryContext,
    governing: RuleSetVersion,
    goal: string,
    onFound: (found: Fewest) => void,
  ) => {
    clearTimeout(timer.current);
    const steps = fewestChanges(workers, changes, context, governing, goal);
    setSearch({ state: "searching", done: 0, of: 2 ** changes.length });
    const slice = () => {
      const until = performance.now() + SLICE_MS;
      for (;;) {
        const step = steps.next();
        if (step.done) {
          setSearch({ state: "found", found: step.value });
          onFound(step.value);
          return;
        }
        if (performance.now() >= until) {
          setSearch({ state: "searching", ...step.value });
          timer.current = setTimeout(slice);
          return;
        }
      }
    };
    timer.current = setTimeout(slice);
  };
  return { search, start, stop };
}
