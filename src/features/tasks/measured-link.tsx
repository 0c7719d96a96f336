import type { ReactNode } from "react";
import { TextLink } from "../../components/link";
import { hasRole, useUser } from "../session/session";

/** Surveys, recordings and the runs at a place are the office's to read: to others what stands there is only named. */
export function MeasuredLink({ to, children }: { to: string; children: ReactNode }) {
  return hasRole(useUser(), "officer", "auditor") ? (
    <TextLink to={to}>{children}</TextLink>
  ) : (
    children
  );
}
