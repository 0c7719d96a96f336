import type { CrewDetail, CrewView } from "../../shared/schemas/crew";
import { rows } from "../lib/db";
import { inForce } from "../lib/grants";
import { type Actor, visible } from "../lib/policy";
import { crewPolicy } from "../policies";

export type CrewRow = Omit<CrewView, "can">;
export type MembershipRow = CrewDetail["memberships"][number];
export type SupervisorRow = CrewDetail["supervisors"][number];

export async function listCrews(
  actor: Actor,
  { id = null, siteId = null }: { id?: string | null; siteId?: string | null },
): Promise<CrewRow[]> {
  return rows<CrewRow>(
    `SELECT c.id, c.site_id AS "siteId", s.name AS "siteName", c.name, to_char(c.usual_start, 'HH24:MI') AS "usualStart",
       c.usual_length_min AS "usualLengthMin", c.is_archived AS "isArchived", c.revision,
       (SELECT count(*)::int FROM crew_memberships m WHERE m.crew_id = c.id AND m.valid @> today.date) AS "membersToday",
       coalesce((SELECT json_agg(u.name ORDER BY u.name) FROM crew_supervisors v JOIN users u ON u.id = v.user_id
                 WHERE v.crew_id = c.id AND v.valid @> today.date AND u.revoked_at IS NULL), '[]') AS "supervisorNames"
     FROM crews c JOIN sites s ON s.id = c.site_id
     CROSS JOIN LATERAL (SELECT (now() AT TIME ZONE s.time_zone)::date AS date) today
     WHERE ${visible(crewPolicy, actor, "c")}
       AND (CAST(:id AS uuid) IS NULL OR c.id = :id) AND (CAST(:siteId AS uuid) IS NULL OR c.site_id = :siteId)
     ORDER BY c.is_archived, s.name, c.name, c.id`,
    { id, siteId },
  );
}

const dates = (range: string) =>
  `lower(${range})::text AS "fromDate", (upper(${range}) - 1)::text AS "toDate"`;

/** Memberships of a crew; a supervisor meets those of the time in which the crew was theirs. */
export async function listMemberships(
  actor: Actor,
  crew: { id: string; siteId: string },
): Promise<MembershipRow[]> {
  const isWhole = actor.isAt(crew.siteId, "officer", "auditor");
  return rows<MembershipRow>(
    `SELECT m.id, m.worker_id AS "workerId", w.name AS "workerName", w.employee_number AS "employeeNumber", m.is_loan AS "isLoan", ${dates("m.valid")}
     FROM crew_memberships m JOIN workers w ON w.id = m.worker_id
     WHERE m.crew_id = :crewId AND (:isWhole OR EXISTS (
       SELECT 1 FROM crew_supervisors s WHERE s.crew_id = m.crew_id AND s.user_id = :userId AND s.valid && m.valid))
     ORDER BY w.name, w.id, lower(m.valid) DESC`,
    { crewId: crew.id, isWhole, userId: actor.userId },
  );
}

export async function listSupervisors(crewId: string): Promise<SupervisorRow[]> {
  return rows<SupervisorRow>(
    `SELECT s.id, s.user_id AS "userId", u.name AS "userName", ${dates("s.valid")}
     FROM crew_supervisors s JOIN users u ON u.id = s.user_id WHERE s.crew_id = :crewId
     ORDER BY u.name, u.id, lower(s.valid) DESC`,
    { crewId },
  );
}

/** People who hold the supervisor's role at a site. */
export async function listSupervisorNames(siteId: string): Promise<{ id: string; name: string }[]> {
  return rows(
    `SELECT u.id, u.name FROM users u WHERE u.revoked_at IS NULL AND EXISTS (
       SELECT 1 FROM role_grants g WHERE g.user_id = u.id AND g.role = 'supervisor' AND ${inForce("g")}
         AND (g.site_id IS NULL OR g.site_id = :siteId))
     ORDER BY u.name, u.id`,
    { siteId },
  );
}
