import type { ReactNode } from "react";

/** A polite word about what just happened or is going on: "saved", "38 saved, 2 wait". Read out when it changes. */
export function Status({ children }: { children: ReactNode }) {
  return (
    <span className="status" role="status" aria-live="polite">
      {children}
    </span>
  );
}
