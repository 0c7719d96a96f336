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
  isRevoked: boolean;
}

/**
 * The person behind a session, as granted at this moment: a revoked grant or user is gone at the next request.
 *
 * @throws AppError signed-out; access-ended where the last grant ended by itself; access-taken where somebody took it
 */
export async function loadActor(userId: string, epoch: number): Promise<Actor> {
  const user = await row<UserRow>(
    `SELECT u.id, u.organization_id AS "organizationId", u.name, u.email, u.language, u.worker_id AS "workerId", u.session_epoch AS "sessionEpoch",
       coalesce((SELECT json_agg(json_build_object('role', g.role, 'siteId', g.site_id, 'year', g.year)) FROM role_grants g
                 WHERE g.user_id = u.id AND g.role <> 'employer' AND ${inForce("g")}), '[]') AS grants,
       coalesce((SELECT json_agg(json_build_object('id', g.id, 'siteId', g.site_id)) FROM role_grants g
                 WHERE g.user_id = u.id AND g.role = 'employer' AND ${inForce("g")}), '[]') AS "employerGrants",
       ${lastEnd("u")} AS "endedAt", u.revoked_at IS NOT NULL AS "isRevoked"
     FROM users u WHERE u.id = :userId`,
    { userId },
  );
  if (user?.isRevoked) throw new AppError("access-taken", 401);
  if (!user || user.sessionEpoch !== epoch) throw new AppError("signed-out", 401);
  if (user.grants.length + user.employerGrants.length === 0)
    throw new AppError(user.endedAt === null ? "access-taken" : "access-ended", 401);
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
