import { rows } from "../lib/db";
import { isAbsentOn, isLentOn } from "./attendance";

export interface DayProgress {
  date: string;
  members: number;
  saved: number;
  absent: number;
}

/**
 * SQL: the workers whom a crew has on a date, without those lent away or gone, or whose day stands with another shift.
 * `crew` and `date` are SQL, here as below.
 */
const belonging = (crew: string, date: string): string =>
  `SELECT m.worker_id FROM crew_memberships m JOIN workers w ON w.id = m.worker_id
   WHERE m.crew_id = ${crew} AND m.valid @> ${date} AND (w.left_on IS NULL OR w.left_on >= ${date}) AND NOT ${isLentOn("m", date)}
     AND NOT EXISTS (SELECT 1 FROM shifts o WHERE o.worker_id = m.worker_id AND o.date = ${date} AND NOT o.is_void AND o.crew_id IS DISTINCT FROM ${crew})`;

const entered = (crew: string, date: string): string =>
  `SELECT f.worker_id FROM shifts f WHERE f.crew_id = ${crew} AND f.date = ${date} AND NOT f.is_void`;

/**
 * SQL columns: of a crew's day its people, with whoever is entered and was lent away or left since; those entered; and those
 * not in. Nobody counts in two of the last, so that the rest of its people is who still has to be entered.
 */
export const PROGRESS_COLUMNS = (crew: string, date: string): string =>
  `(SELECT count(*)::int FROM (${belonging(crew, date)} UNION ${entered(crew, date)}) AS people) AS members,
   (SELECT count(DISTINCT e.worker_id)::int FROM (${entered(crew, date)}) AS e) AS saved,
   (SELECT count(DISTINCT b.worker_id)::int FROM (${belonging(crew, date)}) AS b
    WHERE ${isAbsentOn("b.worker_id", date)} AND b.worker_id NOT IN (${entered(crew, date)})) AS absent`;

/** How far each of a crew's days is entered, latest first. */
export async function crewProgress(
  crewId: string,
  from: string,
  to: string,
): Promise<DayProgress[]> {
  return rows<DayProgress>(
    `SELECT d.date::date::text AS date, ${PROGRESS_COLUMNS(":crewId", "d.date::date")}
     FROM generate_series(CAST(:from AS date), CAST(:to AS date), interval '1 day') AS d(date) ORDER BY d.date DESC`,
    { crewId, from, to },
  );
}
