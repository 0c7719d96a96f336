import type { UserView } from "../../shared/schemas/user";
import { rows } from "../lib/db";
import { inForce } from "../lib/grants";
import { type Actor, visible } from "../lib/policy";
import { userPolicy } from "../policies";

export type UserRow = Omit<UserView, "can" | "grants" | "lastSignInAt" | "revokedAt"> & {
  grants: Omit<UserView["grants"][number], "isWithinReach">[];
  lastSignInAt: Date | null;
  revokedAt: Date | null;
};

/** People who may sign in, and those who no longer may, with the roles they hold. */
export async function listUsers(actor: Actor, id: string | null = null): Promise<UserRow[]> {
  return rows<UserRow>(
    `SELECT u.id, u.name, u.email, u.expected_subject AS "expectedSubject", u.subject IS NOT NULL AS "isBound",
       u.worker_id AS "workerId", w.name AS "workerName", u.language, u.last_sign_in_at AS "lastSignInAt",
       u.revoked_at AS "revokedAt", u.revision,
       coalesce((SELECT json_agg(json_build_object('id', g.id, 'role', g.role, 'siteId', g.site_id, 'siteName', s.name, 'year', g.year, 'endsAt', g.ends_at, 'groupName', p.group_name) ORDER BY g.role, s.name)
                 FROM role_grants g LEFT JOIN sites s ON s.id = g.site_id LEFT JOIN group_mappings p ON p.id = g.mapping_id
                 WHERE g.user_id = u.id AND ${inForce("g")}), '[]') AS grants
     FROM users u LEFT JOIN workers w ON w.id = u.worker_id
     WHERE ${visible(userPolicy, actor, "u")} AND (CAST(:id AS uuid) IS NULL OR u.id = :id)
     ORDER BY u.revoked_at IS NOT NULL, u.name, u.id`,
    { id },
  );
}
