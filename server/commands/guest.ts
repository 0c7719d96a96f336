import type { ProblemIssue } from "../../shared/schemas/problem";
import { addDays, atLocalTime } from "../../shared/time/zone";
import { dateIssues, todayAt } from "../lib/calendar";
import { execute, row } from "../lib/db";
import { AppError, issue } from "../lib/errors";
import type { Actor, Role } from "../lib/policy";
import type { Site } from "../models/site";
import { User } from "../models/user";

/** Nobody is a guest for longer without being asked for anew: for more there are roles. */
const LONGEST_DAYS = 366;

/** The instant at which a local day is over: the first that the next one has. */
export function endOfDay(date: string, timeZone: string): Date {
  const next = addDays(date, 1);
  const midnight = atLocalTime(next, "00:00", timeZone);
  if (midnight.kind === "one") return midnight.instant;
  if (midnight.kind === "twice") return midnight.first;
  // Where the clock is set forward at midnight, the day begins at one.
  const later = atLocalTime(next, "01:00", timeZone);
  return later.kind === "one" ? later.instant : endOfDay(next, timeZone);
}

/** What is wrong with the last day on which a guest is to read. */
export function lastDayIssues(
  lastDay: string,
  { timeZone }: Pick<Site, "timeZone">,
): ProblemIssue[] {
  const today = todayAt(timeZone);
  const issues = dateIssues(["lastDay"], lastDay, LONGEST_DAYS);
  if (lastDay < today) issues.push(issue(["lastDay"], "day-is-over", { today }));
  return issues;
}

/**
 * Who signs in under an e-mail address, known here already or let in now.
 *
 * @throws AppError own-grant: nobody is their own guest
 */
export async function findOrAddGuest(
  actor: Actor,
  { name, email, language }: { name: string; email: string; language: string },
): Promise<{ id: string; isNew: boolean }> {
  const known = await row<{ id: string }>(
    "SELECT id FROM users WHERE lower(email) = lower(:email) AND revoked_at IS NULL",
    { email },
  );
  const user =
    known ?? (await User.create({ organizationId: actor.organizationId, name, email, language }));
  if (user.id === actor.userId) throw new AppError("own-grant", 403);
  return { id: user.id, isNew: known === null };
}

/** What stands in the way where one of these roles opens all of a site to somebody anyway. */
export async function alreadyReads(
  userId: string,
  siteId: string,
  roles: readonly Role[],
): Promise<ProblemIssue[]> {
  const wider = await row(
    `SELECT 1 AS one FROM role_grants g WHERE g.user_id = :userId AND g.role = ANY (CAST(:roles AS text[])) AND g.year IS NULL AND g.revoked_at IS NULL
       AND (g.site_id IS NULL OR g.site_id = :siteId) LIMIT 1`,
    { userId, siteId, roles: `{${roles.join(",")}}` },
  );
  return wider ? [issue(["email"], "reads-it-already")] : [];
}

/**
 * A grant with an end is over now, from the person's next request on.
 *
 * @throws AppError nothing-to-do where it is over already
 */
export async function endGrant(id: string): Promise<void> {
  const ended = await execute(
    "UPDATE role_grants SET revoked_at = now() WHERE id = $1 AND revoked_at IS NULL AND ends_at > now()",
    [id],
  );
  if (ended === 0) throw new AppError("nothing-to-do", 409);
}
