import type { ReactNode } from "react";

/** What the server says this person may do with a record, sent beside its fields. */
export type Can = Readonly<Record<string, boolean>>;

/** Shows what only some may do. A right that was not sent is not there. */
export function IfCan({
  can,
  to,
  children,
  otherwise = null,
}: {
  can: Can | undefined;
  to: string;
  children: ReactNode;
  otherwise?: ReactNode;
}) {
  return can?.[to] === true ? children : otherwise;
}
