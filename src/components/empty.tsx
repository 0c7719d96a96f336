import type { ReactNode } from "react";

/** Nothing here: why, and the one thing to do. */
export function Empty({ title, children }: { title: ReactNode; children?: ReactNode }) {
  return (
    <div className="empty">
      <p>{title}</p>
      {children && <p>{children}</p>}
    </div>
  );
}
