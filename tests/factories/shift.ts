import { randomUUID } from "node:crypto";
import { insert, select } from "./insert";
import type { Worker } from "./worker";

interface ShiftOverrides {
  date?: string;
  /** Local, and for the tests' shifts also UTC. */
  localStart?: string;
  lengthMin?: number;
  crewId?: string;
  tasks?: { taskId: string; durationMin: number; wornPct?: number }[];
}

/** A shift with its first revision, worked in UTC at the worker's site. Returns its id. */
export async function buildShift(worker: Worker, overrides: ShiftOverrides = {}): Promise<string> {
  const { organizationId, siteId, id: workerId } = worker;
  const {
    date = "2026-03-02",
    localStart = "06:00",
    lengthMin = 480,
    crewId = null,
    tasks = [],
  } = overrides;
  const [shiftId, shiftRevisionId] = [randomUUID(), randomUUID()];
  // Head and revision name each other, so that one statement writes both.
  await select(
    `WITH head AS (
       INSERT INTO shifts (id, organization_id, site_id, worker_id, crew_id, date, local_start, time_zone, length_min, starts_at, ends_at, current_revision_id)
       SELECT $1, $3, $4, $5, $6, $7::date, $8::time, 'UTC', $9::int, s, s + make_interval(mins => $9::int), $2
       FROM (SELECT ($7::date + $8::time) AT TIME ZONE 'UTC' AS s) start)
     INSERT INTO shift_revisions (id, organization_id, shift_id, number, local_start, length_min) VALUES ($2, $3, $1, 1, $8::time, $9::int)`,
    [
      shiftId,
      shiftRevisionId,
      organizationId,
      siteId,
      workerId,
      crewId,
      date,
      localStart,
      lengthMin,
    ],
  );
  for (const [position, task] of tasks.entries()) {
    await insert("shift_tasks", { organizationId, shiftId, shiftRevisionId, position, ...task });
  }
  return shiftId;
}
