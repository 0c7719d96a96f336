import { row } from "../lib/db";
import { AppError } from "../lib/errors";
import { Actor, type Role } from "../lib/policy";

interface UserRow {
  id: string;
  organizationId: string;
  name: string;
  email: string | null;
  language: string;
  workerId: string | null;
  sessionEpoch: number;
  grants: { role: Role; siteId: string | null }[];
}

/**
 * The person behind a session, as granted at this moment: a revoked grant or user is gone at the next request.
 *
 * @throws AppError signed-out
 */
export async function loadActor(userId: string, epoch: number): Promise<Actor> {
  const user = await row<UserRow>(
    `SELECT u.id, u.organization_id AS "organizationId", u.name, u.email, u.language, u.worker_id AS "workerId", u.session_epoch AS "sessionEpoch",
       coalesce((SELECT json_agg(json_build_object('role', g.role, 'siteId', g.site_id)) FROM role_grants g
                 WHERE g.user_id = u.id AND g.revoked_at IS NULL), '[]') AS grants
     FROM users u WHERE u.id = :userId AND u.revoked_at IS NULL`,
    { userId },
  );
  if (!user || user.sessionEpoch !== epoch || user.grants.length === 0)
    throw new AppError("signed-out", 401);
  return new Actor(
    user.id,
    user.organizationId,
    user.name,
    user.email,
    user.language,
    user.workerId,
    user.grants,
  );
}
