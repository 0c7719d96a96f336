import { useRef } from "react";

/**
 * Lets one change through at a time. That it is being sent reaches the button with the next render only, and a double
 * click comes before it.
 */
export function useOneAtATime(): {
  /** Whether this one may go; if so, `end` has to follow. */
  begin: () => boolean;
  end: () => void;
} {
  const isSending = useRef(false);
  return {
    begin() {
      if (isSending.current) return false;
      isSending.current = true;
      return true;
    },
    end() {
      isSending.current = false;
    },
  };
}
