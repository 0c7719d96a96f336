import type { AttendanceView } from "../../shared/schemas/attendance";
import { todayAt } from "../lib/calendar";
import { row, rows } from "../lib/db";
import type { Crew } from "../models/worker";

/**
 * SQL: a worker is not in on a date: as the day was entered, or as a supervisor said ahead where no shift speaks against
 * it. `worker` and `date` are SQL.
 */
export const isAbsentOn = (worker: string, date: string): string =>
  `(EXISTS (SELECT 1 FROM absences a WHERE a.worker_id = ${worker} AND a.date = ${date})
    OR (EXISTS (SELECT 1 FROM absence_spans p WHERE p.worker_id = ${worker} AND p.valid @> ${date} AND NOT p.is_struck)
      AND NOT EXISTS (SELECT 1 FROM shifts h WHERE h.worker_id = ${worker} AND h.date = ${date} AND NOT h.is_void)))`;

/** SQL: the membership `m` is one of a crew's own, and on the date another crew has the worker on loan. */
export const isLentOn = (m: string, date: string): string =>
  `(NOT ${m}.is_loan AND EXISTS (SELECT 1 FROM crew_memberships l
    WHERE l.worker_id = ${m}.worker_id AND l.is_loan AND l.crew_id <> ${m}.crew_id AND l.valid @> ${date}))`;

/** SQL: the membership `m` is the worker's own, began before a day and runs on it: it ends where another begins. */
export const isOwnRunningOn = (m: string, worker: string, date: string): string =>
  `(${m}.worker_id = ${worker} AND NOT ${m}.is_loan AND lower(${m}.valid) < ${date} AND (upper_inf(${m}.valid) OR upper(${m}.valid) > ${date}))`;

const dates = (range: string) =>
  `lower(${range})::text AS "fromDate", (upper(${range}) - 1)::text AS "toDate"`;

/**
 * What a crew's supervisor plans with. Of somebody lent to the crew only the days of the loan show: an absence is cut to
 * them.
 */
export async function attendance(crew: Crew): Promise<AttendanceView> {
  const site = await row<{ timeZone: string }>(
    `SELECT time_zone AS "timeZone" FROM sites WHERE id = :id`,
    { id: crew.siteId },
  );
  const timeZone = site?.timeZone ?? "UTC";
  const today = todayAt(timeZone);
  const given = { crewId: crew.id, siteId: crew.siteId, today };
  return {
    crew: { id: crew.id, name: crew.name, timeZone },
    today,
    members: await rows<AttendanceView["members"][number]>(
      `SELECT w.id, w.name, bool_and(m.is_loan) AS "isLoan" FROM crew_memberships m JOIN workers w ON w.id = m.worker_id
       WHERE m.crew_id = :crewId AND (upper_inf(m.valid) OR upper(m.valid) > CAST(:today AS date)) AND (NOT m.is_loan OR m.valid @> CAST(:today AS date))
         AND (w.left_on IS NULL OR w.left_on >= CAST(:today AS date))
       GROUP BY w.id, w.name ORDER BY w.name, w.id`,
      given,
    ),
    // As said ahead, and as today was entered.
    absences: await rows<AttendanceView["absences"][number]>(
      `SELECT p.id, json_build_object('id', w.id, 'name', w.name) AS worker, ${dates("s.days")}, p.revision, p.crew_id = :crewId AS "canChange"
       FROM absence_spans p JOIN workers w ON w.id = p.worker_id
       JOIN LATERAL (SELECT range_merge(range_agg(p.valid * m.valid)) AS days FROM crew_memberships m
         WHERE m.crew_id = :crewId AND m.worker_id = p.worker_id AND m.valid && p.valid AND (NOT m.is_loan OR m.valid @> CAST(:today AS date))) s ON TRUE
       WHERE NOT p.is_struck AND s.days IS NOT NULL AND NOT isempty(s.days) AND (upper_inf(s.days) OR upper(s.days) > CAST(:today AS date))
       UNION ALL
       SELECT w.id, json_build_object('id', w.id, 'name', w.name), :today, :today, 0, FALSE
       FROM absences a JOIN crew_memberships m ON m.worker_id = a.worker_id AND m.crew_id = :crewId AND m.valid @> a.date JOIN workers w ON w.id = a.worker_id
       WHERE a.date = CAST(:today AS date) AND NOT EXISTS (SELECT 1 FROM absence_spans p WHERE p.worker_id = w.id AND p.valid @> a.date AND NOT p.is_struck)
       ORDER BY 3, 1`,
      given,
    ),
    loans: await rows<AttendanceView["loans"][number]>(
      `SELECT m.id, json_build_object('id', w.id, 'name', w.name) AS worker, ${dates("m.valid")}, m.revision, 'out' AS way, c.name AS "crewName", TRUE AS "canChange"
       FROM crew_memberships m JOIN workers w ON w.id = m.worker_id JOIN crews c ON c.id = m.crew_id
       WHERE m.is_loan AND m.crew_id <> :crewId AND c.site_id = :siteId AND upper(m.valid) > CAST(:today AS date)
         AND EXISTS (SELECT 1 FROM crew_memberships o WHERE o.worker_id = m.worker_id AND o.crew_id = :crewId AND NOT o.is_loan AND o.valid && m.valid)
       UNION ALL
       SELECT m.id, json_build_object('id', w.id, 'name', w.name), ${dates("m.valid")}, m.revision, 'in', coalesce((SELECT c.name FROM crew_memberships o JOIN crews c ON c.id = o.crew_id
           WHERE o.worker_id = m.worker_id AND NOT o.is_loan AND o.valid @> CAST(:today AS date) ORDER BY c.name LIMIT 1), ''), FALSE
       FROM crew_memberships m JOIN workers w ON w.id = m.worker_id
       WHERE m.is_loan AND m.crew_id = :crewId AND m.valid @> CAST(:today AS date)
       ORDER BY 3, 1`,
      given,
    ),
    otherCrews: await rows<AttendanceView["otherCrews"][number]>(
      "SELECT id, name FROM crews WHERE site_id = :siteId AND id <> :crewId AND NOT is_archived ORDER BY name, id",
      given,
    ),
  };
}
