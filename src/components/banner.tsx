import type { ReactNode } from "react";

/** An ink line on top of the page: lost connection, expired session, mail down. */
export function Banner({
  title,
  children,
  action,
}: {
  title: ReactNode;
  children?: ReactNode;
  action?: ReactNode;
}) {
  return (
    <div className="banner" role="status">
      <b>{title}</b>
      {children && <span>{children}</span>}
      {action}
    </div>
  );
}
