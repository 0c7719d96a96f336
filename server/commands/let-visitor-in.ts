import type { VisitorInput } from "../../shared/schemas/visitor";
import { addDays, atLocalTime } from "../../shared/time/zone";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { execute, row } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import { RoleGrant, User } from "../models/user";

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

/** Nobody is a visitor for longer than that: for more there are roles. */
const LONGEST_DAYS = 366;

/**
 * Grants somebody one year of one site until a day is over there. Who signs in under that e-mail already keeps what they
 * have; a visit to the same year is lengthened or shortened by being granted anew.
 */
export async function letVisitorIn(
  actor: Actor,
  site: Pick<Site, "id" | "timeZone">,
  input: VisitorInput,
): Promise<string> {
  const { name, email, year, language } = input;
  const today = todayAt(site.timeZone);
  const lastDay = input.lastDay ?? today;
  const issues = dateIssues(["lastDay"], lastDay, LONGEST_DAYS);
  if (lastDay < today) issues.push(issue(["lastDay"], "day-is-over", { today }));
  if (year > Number(today.slice(0, 4))) issues.push(issue(["year"], "year-not-begun"));
  if (issues.length > 0) throw unprocessable(issues);
  const known = await row<{ id: string }>(
    "SELECT id FROM users WHERE lower(email) = lower(:email) AND revoked_at IS NULL",
    { email },
  );
  const user =
    known ?? (await User.create({ organizationId: actor.organizationId, name, email, language }));
  if (user.id === actor.userId) throw new AppError("own-grant", 403);
  const wider = await row(
    `SELECT 1 AS one FROM role_grants g WHERE g.user_id = :userId AND g.role = 'auditor' AND g.year IS NULL AND g.revoked_at IS NULL
       AND (g.site_id IS NULL OR g.site_id = :siteId) LIMIT 1`,
    { userId: user.id, siteId: site.id },
  );
  if (wider) throw unprocessable([issue(["email"], "reads-it-already")]);
  await execute(
    "UPDATE role_grants SET revoked_at = least(now(), ends_at) WHERE user_id = $1 AND site_id = $2 AND year = $3 AND revoked_at IS NULL",
    [user.id, site.id, year],
  );
  const endsAt = endOfDay(lastDay, site.timeZone);
  const grant = await RoleGrant.create({
    organizationId: actor.organizationId,
    userId: user.id,
    role: "auditor",
    siteId: site.id,
    grantedBy: actor.userId,
    year,
    endsAt,
  });
  await recordAudit(actor, {
    action: "let-visitor-in",
    subjectKind: "user",
    subjectId: user.id,
    values: { siteId: site.id, year, endsAt, ...(known ? {} : { name, email }) },
  });
  return grant.id;
}

/** The visit is over from the visitor's next request on. */
export async function endVisit(
  actor: Actor,
  visit: { id: string; userId: string; siteId: string; year: number },
): Promise<void> {
  const ended = await execute(
    "UPDATE role_grants SET revoked_at = now() WHERE id = $1 AND revoked_at IS NULL AND ends_at > now()",
    [visit.id],
  );
  if (ended === 0) throw new AppError("nothing-to-do", 409);
  await recordAudit(actor, {
    action: "end-visit",
    subjectKind: "user",
    subjectId: visit.userId,
    values: { siteId: visit.siteId, year: visit.year },
  });
}
