import { useEffect, useState } from "react";

const secondsTo = (untilMs: number | null) =>
  untilMs === null ? 0 : Math.max(0, Math.ceil((untilMs - Date.now()) / 1000));

/** Whole seconds until a moment on this device's clock, counted down to nothing; null: to none. */
export function useSecondsLeft(untilMs: number | null): number {
  const [, setShown] = useState(0);
  useEffect(() => {
    if (untilMs === null) return;
    const timer = setInterval(() => {
      const left = secondsTo(untilMs);
      setShown(left);
      if (left === 0) clearInterval(timer);
    }, 250);
    return () => clearInterval(timer);
  }, [untilMs]);
  return secondsTo(untilMs);
}
