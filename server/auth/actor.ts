import { row } from "../lib/db";
import { AppError } from "../lib/errors";
import { inForce, lastEnd } from "../lib/grants";
import { Actor, type EmployerGrant, type Grant } from "../lib/policy";

interface UserRow {
  id: string;
  organizationId: string;
  name: string;
  email: string | null;
  language: string;
  workerId: string | null;
  sessionEpoch: number;
  grants: Grant[];
  employerGrants: EmployerGrant[];
  /** When the last of the grants that ended by themselves did. */
  endedAt: Date | null;
}

/**
 * The person behind a session, as granted at this moment: a revoked grant or user is gone at the next request.
 *
 * @throws AppError signed-out; access-ended where the last grant ended by itself
 */
export async function loadActor(userId: string, epoch: number): Promise<Actor> {
  const user = await row<UserRow>(
    `SELECT u.id, u.organization_id AS "organizationId", u.name, u.email, u.language, u.worker_id AS "workerId", u.session_epoch AS "sessionEpoch",
       coalesce((SELECT json_agg(json_build_object('role', g.role, 'siteId', g.site_id, 'year', g.year)) FROM role_grants g
                 WHERE g.user_id = u.id AND g.role <> 'employer' AND ${inForce("g")}), '[]') AS grants,
       coalesce((SELECT json_agg(json_build_object('id', g.id, 'siteId', g.site_id)) FROM role_grants g
                 WHERE g.user_id = u.id AND g.role = 'employer' AND ${inForce("g")}), '[]') AS "employerGrants",
       ${lastEnd("u")} AS "endedAt"
     FROM users u WHERE u.id = :userId AND u.revoked_at IS NULL`,
    { userId },
  );
  if (!user || user.sessionEpoch !== epoch) throw new AppError("signed-out", 401);
  if (user.grants.length + user.employerGrants.length === 0)
    throw new AppError(user.endedAt === null ? "signed-out" : "access-ended", 401);
  return new Actor(
    user.id,
    user.organizationId,
    user.name,
    user.email,
    user.language,
    user.workerId,
    user.grants,
    user.employerGrants,
  );
}
