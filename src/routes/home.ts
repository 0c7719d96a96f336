import type { SessionUser } from "../../shared/schemas/session";
import { hasRole } from "../features/session/session";
import { paths } from "../paths";

/** Where somebody's day begins: with several roles, the one that has most to do. */
export function homeOf(user: Pick<SessionUser, "roles">): string {
  if (hasRole(user, "officer")) return paths.waiting;
  if (hasRole(user, "supervisor")) return paths.crewSheet;
  if (hasRole(user, "auditor", "visitor")) return paths.yearFile;
  if (hasRole(user, "administrator")) return paths.people;
  if (hasRole(user, "representative")) return paths.siteFigures;
  if (hasRole(user, "employer")) return paths.sharedResults;
  return paths.me;
}
