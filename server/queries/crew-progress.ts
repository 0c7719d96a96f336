import { rows } from "../lib/db";
import { isAbsentOn, isLentOn } from "./attendance";

export interface DayProgress {
  date: string;
  members: number;
  saved: number;
  absent: number;
}

/** How far each of a crew's days is entered, latest first. */
export async function crewProgress(
  crewId: string,
  from: string,
  to: string,
): Promise<DayProgress[]> {
  return rows<DayProgress>(
    `SELECT d.date::date::text AS date,
       (SELECT count(*)::int FROM crew_memberships m JOIN workers w ON w.id = m.worker_id
        WHERE m.crew_id = :crewId AND m.valid @> d.date::date AND (w.left_on IS NULL OR w.left_on >= d.date) AND NOT ${isLentOn("m", "d.date::date")}) AS members,
       (SELECT count(*)::int FROM shifts s WHERE s.crew_id = :crewId AND s.date = d.date AND NOT s.is_void) AS saved,
       (SELECT count(*)::int FROM crew_memberships m WHERE m.crew_id = :crewId AND m.valid @> d.date::date
        AND NOT ${isLentOn("m", "d.date::date")} AND ${isAbsentOn("m.worker_id", "d.date::date")}) AS absent
     FROM generate_series(CAST(:from AS date), CAST(:to AS date), interval '1 day') AS d(date) ORDER BY d.date DESC`,
    { crewId, from, to },
  );
}
