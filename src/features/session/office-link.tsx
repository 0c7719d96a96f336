import type { ReactNode } from "react";
import { TextLink } from "../../components/link";
import { hasRole, useUser } from "./session";

/** To a list that is the office's; to others, whose list it is not, its name alone. */
export function OfficeLink({ to, children }: { to: string; children: ReactNode }) {
  return hasRole(useUser(), "officer", "auditor", "visitor") ? (
    <TextLink to={to}>{children}</TextLink>
  ) : (
    children
  );
}
