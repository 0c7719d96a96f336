import type { EmployerShareInput } from "../../shared/schemas/employer-share";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { execute, row } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import { RoleGrant, User } from "../models/user";
import { outsideEmployers } from "../queries/employer-shares";
import { endOfDay } from "./let-visitor-in";

/** Nobody reads on for longer without being asked for anew. */
const LONGEST_DAYS = 366;

/**
 * Lets somebody of an outside employer read its people's results at a site until a day is over there. The same person for
 * the same employer again is lengthened or shortened.
 */
export async function shareWithEmployer(
  actor: Actor,
  site: Pick<Site, "id" | "timeZone">,
  input: EmployerShareInput,
): Promise<string> {
  const { employer, name, email, lastDay, language } = input;
  const employerKind = employer.startsWith("agency:") ? "agency" : "contractor";
  const employerName = employer.slice(employerKind.length + 1).trim();
  const today = todayAt(site.timeZone);
  const issues = dateIssues(["lastDay"], lastDay, LONGEST_DAYS);
  if (lastDay < today) issues.push(issue(["lastDay"], "day-is-over", { today }));
  const isHere = (await outsideEmployers(site.id)).some(
    (one) => one.kind === employerKind && one.name === employerName,
  );
  if (!isHere) issues.push(issue(["employer"], "not-at-site"));
  if (issues.length > 0) throw unprocessable(issues);
  const known = await row<{ id: string }>(
    "SELECT id FROM users WHERE lower(email) = lower(:email) AND revoked_at IS NULL",
    { email },
  );
  const user =
    known ?? (await User.create({ organizationId: actor.organizationId, name, email, language }));
  if (user.id === actor.userId) throw new AppError("own-grant", 403);
  const wider = await row(
    `SELECT 1 AS one FROM role_grants g WHERE g.user_id = :userId AND g.role IN ('officer', 'auditor') AND g.year IS NULL AND g.revoked_at IS NULL
       AND (g.site_id IS NULL OR g.site_id = :siteId) LIMIT 1`,
    { userId: user.id, siteId: site.id },
  );
  if (wider) throw unprocessable([issue(["email"], "reads-it-already")]);
  await execute(
    `UPDATE role_grants SET revoked_at = least(now(), ends_at)
     WHERE user_id = $1 AND role = 'employer' AND site_id = $2 AND employer_kind = $3 AND employer_name = $4 AND revoked_at IS NULL`,
    [user.id, site.id, employerKind, employerName],
  );
  const endsAt = endOfDay(lastDay, site.timeZone);
  const grant = await RoleGrant.create({
    organizationId: actor.organizationId,
    userId: user.id,
    role: "employer",
    siteId: site.id,
    grantedBy: actor.userId,
    employerKind,
    employerName,
    endsAt,
  });
  await recordAudit(actor, {
    action: "share-with-employer",
    subjectKind: "user",
    subjectId: user.id,
    values: { siteId: site.id, employerName, endsAt, ...(known ? {} : { name, email }) },
  });
  return grant.id;
}

/** It is over from that person's next request on. */
export async function endEmployerShare(
  actor: Actor,
  share: { id: string; userId: string; siteId: string; employerName: string },
): Promise<void> {
  const ended = await execute(
    "UPDATE role_grants SET revoked_at = now() WHERE id = $1 AND revoked_at IS NULL AND ends_at > now()",
    [share.id],
  );
  if (ended === 0) throw new AppError("nothing-to-do", 409);
  await recordAudit(actor, {
    action: "end-employer-share",
    subjectKind: "user",
    subjectId: share.userId,
    values: { siteId: share.siteId, employerName: share.employerName },
  });
}
