import type { VisitorInput } from "../../shared/schemas/visitor";
import { recordAudit } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { execute } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import { RoleGrant } from "../models/user";
import { alreadyReads, endGrant, endOfDay, findOrAddGuest, lastDayIssues } from "./guest";

/**
 * Grants somebody one year of one site until a day is over there. Who signs in under that e-mail already keeps what they
 * have; a visit to the same year is lengthened or shortened by being granted anew.
 */
export async function letVisitorIn(
  actor: Actor,
  site: Pick<Site, "id" | "timeZone">,
  input: VisitorInput,
): Promise<string> {
  const { name, email, year } = input;
  const today = todayAt(site.timeZone);
  const lastDay = input.lastDay ?? today;
  const issues = lastDayIssues(lastDay, site);
  if (year > Number(today.slice(0, 4))) issues.push(issue(["year"], "year-not-begun"));
  if (issues.length > 0) throw unprocessable(issues);
  const user = await findOrAddGuest(actor, input);
  const wider = await alreadyReads(user.id, site.id, ["auditor"]);
  if (wider.length > 0) throw unprocessable(wider);
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
    values: { siteId: site.id, year, endsAt, ...(user.isNew ? { name, email } : {}) },
  });
  return grant.id;
}

/** The visit is over from the visitor's next request on. */
export async function endVisit(
  actor: Actor,
  visit: { id: string; userId: string; siteId: string; year: number },
): Promise<void> {
  await endGrant(visit.id);
  await recordAudit(actor, {
    action: "end-visit",
    subjectKind: "user",
    subjectId: visit.userId,
    values: { siteId: visit.siteId, year: visit.year },
  });
}
