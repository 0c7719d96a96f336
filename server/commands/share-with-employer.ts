import type { EmployerShareInput } from "../../shared/schemas/employer-share";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import { RoleGrant } from "../models/user";
import { outsideEmployers } from "../queries/employer-shares";
import { alreadyReads, endGrant, endOfDay, findOrAddGuest, lastDayIssues } from "./guest";

/**
 * Lets somebody of an outside employer read its people's results at a site until a day is over there. The same person for
 * the same employer again is lengthened or shortened.
 */
export async function shareWithEmployer(
  actor: Actor,
  site: Pick<Site, "id" | "timeZone">,
  input: EmployerShareInput,
): Promise<string> {
  const { employer, name, email, lastDay } = input;
  const employerKind = employer.startsWith("agency:") ? "agency" : "contractor";
  const employerName = employer.slice(employerKind.length + 1).trim();
  const issues = lastDayIssues(lastDay, site);
  const isHere = (await outsideEmployers(site.id)).some(
    (one) => one.kind === employerKind && one.name === employerName,
  );
  if (!isHere) issues.push(issue(["employer"], "not-at-site"));
  if (issues.length > 0) throw unprocessable(issues);
  const user = await findOrAddGuest(actor, input);
  const wider = await alreadyReads(user.id, site.id, ["officer", "auditor"]);
  if (wider.length > 0) throw unprocessable(wider);
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
    values: { siteId: site.id, employerName, endsAt, ...(user.isNew ? { name, email } : {}) },
  });
  return grant.id;
}

/** It is over from that person's next request on. */
export async function endEmployerShare(
  actor: Actor,
  share: { id: string; userId: string; siteId: string; employerName: string },
): Promise<void> {
  await endGrant(share.id);
  await recordAudit(actor, {
    action: "end-employer-share",
    subjectKind: "user",
    subjectId: share.userId,
    values: { siteId: share.siteId, employerName: share.employerName },
  });
}
