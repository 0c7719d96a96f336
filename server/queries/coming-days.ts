import { rows } from "../lib/db";
import { nextShiftSql } from "./next-shift";

/** Where a crew stands in its days; ISO dates of its site. */
export interface ComingDay {
  readonly crewId: string;
  readonly timeZone: string;
  readonly today: string;
  /** The latest one on record. */
  readonly lastDate: string | null;
  /** The one that comes next: today, unless its shift is over and recorded. */
  readonly date: string;
}

/** By the clock of the site a shift is over; one that runs past midnight is over on the next date only. */
const IS_OVER = `extract(epoch FROM now.local::time) / 60 >= extract(epoch FROM c.usual_start) / 60 + c.usual_length_min`;

/** By crew the day that comes next. */
export async function comingDays(crewIds: readonly string[]): Promise<Map<string, ComingDay>> {
  if (crewIds.length === 0) return new Map();
  const found = await rows<ComingDay>(
    `SELECT c.id AS "crewId", s.time_zone AS "timeZone", now.local::date::text AS today, last.date::text AS "lastDate",
       (CASE WHEN last.date = now.local::date AND ${IS_OVER} THEN ${nextShiftSql("c.id", "now.local::date")} ELSE now.local::date END)::text AS date
     FROM crews c JOIN sites s ON s.id = c.site_id
     CROSS JOIN LATERAL (SELECT now() AT TIME ZONE s.time_zone AS local) now
     CROSS JOIN LATERAL (SELECT max(d.date) AS date FROM days d
       WHERE d.crew_id = c.id AND d.date <= now.local::date AND d.current_result_id IS NOT NULL) last
     WHERE c.id = ANY (CAST(:ids AS uuid[]))`,
    { ids: `{${[...new Set(crewIds)].join(",")}}` },
  );
  return new Map(found.map((one) => [one.crewId, one]));
}
