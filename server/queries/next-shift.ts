import { row } from "../lib/db";

/**
 * The day after `date` on which a crew works next, by the weekdays of its last four weeks; the very next one where none
 * is recorded. `crew` and `date` are SQL.
 */
export const nextShiftSql = (crew: string, date: string): string =>
  `coalesce((SELECT min(n.date)::date FROM generate_series(${date} + 1, ${date} + 7, interval '1 day') AS n(date)
     WHERE EXISTS (SELECT 1 FROM days y WHERE y.crew_id = ${crew}
       AND y.date IN (n.date::date - 7, n.date::date - 14, n.date::date - 21, n.date::date - 28))), ${date} + 1)`;

export async function nextShiftDate(crewId: string, date: string): Promise<string> {
  const next = await row<{ date: string }>(
    `SELECT (${nextShiftSql("CAST(:crewId AS uuid)", "CAST(:date AS date)")})::text AS date`,
    { crewId, date },
  );
  if (!next) throw new Error("a date is always found");
  return next.date;
}
