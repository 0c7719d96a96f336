import type { FacedShift } from "../../shared/schemas/run-doubts";
import { rows } from "../lib/db";

/** Which shift a run speaks for: the one it names, or else one of its worker's on its date. */
export interface FacingRun {
  workerId: string | null;
  date: string;
  shiftId?: string | null;
  /** ISO instants, where the run names them. */
  span?: { from: string; to: string | null } | null;
}

type Found = FacedShift & { isOneOfSeveral: boolean };

/**
 * The shift that each run speaks for, in the order asked for: recorded, or the crew's usual one where none is recorded
 * yet. Null where there is neither, or several and nothing says which.
 */
export async function facedShifts(runs: readonly FacingRun[]): Promise<(FacedShift | null)[]> {
  if (runs.length === 0) return [];
  const found = await rows<Found | { from: null }>(
    `WITH x AS (
       SELECT * FROM jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date, "shiftId" uuid, out_at timestamptz, back_at timestamptz, place int)),
     recorded AS (
       SELECT x.place, s.starts_at, s.ends_at, s.time_zone FROM x
       JOIN shifts s ON s.worker_id = x."workerId" AND s.date = x.date AND NOT s.is_void AND (x."shiftId" IS NULL OR s.id = x."shiftId")),
     usual AS (
       SELECT x.place, u.starts_at, u.starts_at + make_interval(mins => u.length_min) AS ends_at, u.time_zone FROM x
       JOIN LATERAL (SELECT (x.date + c.usual_start) AT TIME ZONE z.time_zone AS starts_at, c.usual_length_min AS length_min, z.time_zone
         FROM crew_memberships m JOIN crews c ON c.id = m.crew_id JOIN sites z ON z.id = c.site_id
         WHERE m.worker_id = x."workerId" AND m.valid @> x.date ORDER BY lower(m.valid) DESC LIMIT 1) u ON TRUE
       WHERE NOT EXISTS (SELECT 1 FROM recorded r WHERE r.place = x.place)),
     faced AS (
       SELECT f.*, x.out_at, x.back_at, x."shiftId" AS shift_id, count(*) OVER (PARTITION BY f.place) AS count,
         CASE WHEN x.back_at IS NOT NULL THEN greatest(0, extract(epoch FROM least(f.ends_at, x.back_at) - greatest(f.starts_at, x.out_at)) / 60)::float8 END AS inside
       FROM (SELECT * FROM recorded UNION ALL SELECT * FROM usual) f JOIN x ON x.place = f.place)
     SELECT to_char(f.starts_at AT TIME ZONE f.time_zone, 'HH24:MI') AS "from", to_char(f.ends_at AT TIME ZONE f.time_zone, 'HH24:MI') AS "to",
       (extract(epoch FROM f.ends_at - f.starts_at) / 60)::float8 AS "shiftMin", f.inside AS "insideMin",
       CASE WHEN f.back_at IS NOT NULL THEN (extract(epoch FROM f.out_at - f.starts_at) / 60)::float8 END AS "startOffMin",
       CASE WHEN f.back_at IS NOT NULL THEN (extract(epoch FROM f.back_at - f.ends_at) / 60)::float8 END AS "endOffMin",
       f.count > 1 AND f.inside IS NULL AND f.shift_id IS NULL AS "isOneOfSeveral"
     FROM x LEFT JOIN LATERAL (SELECT * FROM faced t WHERE t.place = x.place ORDER BY t.inside DESC NULLS LAST, t.starts_at LIMIT 1) f ON TRUE
     ORDER BY x.place`,
    [
      JSON.stringify(
        runs.map(({ workerId, date, shiftId = null, span = null }, place) => ({
          workerId,
          date,
          shiftId,
          out_at: span?.to ? span.from : null,
          back_at: span?.to ?? null,
          place,
        })),
      ),
    ],
  );
  return found.map((one) => {
    if (one.from === null || one.isOneOfSeveral) return null;
    const { isOneOfSeveral: _, ...shift } = one;
    return shift;
  });
}

export async function facedShift(run: FacingRun): Promise<FacedShift | null> {
  const [found] = await facedShifts([run]);
  return found ?? null;
}
