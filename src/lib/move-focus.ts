import { useEffect, useRef, useState } from "react";

/**
 * For what goes away together with the focus on it: once the page has changed, the focus moves to the first of the
 * selectors that is found in the place, and the keyboard goes on from there.
 */
export function useMoveFocus<Place extends HTMLElement>() {
  const place = useRef<Place>(null);
  const [wanted, setWanted] = useState<readonly string[]>([]);
  useEffect(() => {
    if (wanted.length === 0) return;
    for (const selector of wanted) {
      const found = place.current?.querySelector<HTMLElement>(selector);
      if (!found) continue;
      found.focus();
      break;
    }
    setWanted([]);
  }, [wanted]);
  return [place, (...selectors: string[]) => setWanted(selectors)] as const;
}
