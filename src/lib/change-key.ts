import { useRef } from "react";
import { newChangeKey } from "./api";

/**
 * The key under which a change counts once. The same body sent again after a lost connection goes under the same key;
 * another body, or the same one after it was saved, gets a new one.
 */
export function useChangeKey(): { keyFor: (body: unknown) => string; forget: () => void } {
  const held = useRef<{ text: string; key: string } | null>(null);
  return {
    keyFor(body) {
      const text = JSON.stringify(body);
      if (held.current?.text !== text) held.current = { text, key: newChangeKey() };
      return held.current.key;
    },
    forget() {
      held.current = null;
    },
  };
}
