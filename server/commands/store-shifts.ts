import { randomUUID } from "node:crypto";
import type { Unaccounted } from "../../shared/acoustics/types";
import type { ShiftTaskInput } from "../../shared/schemas/shift";
import { recordAuditMany } from "../lib/audit";
import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";

/** A shift that has passed every check, ready to be written. */
export interface CheckedShift {
  /** Null: a new one. */
  shiftId: string | null;
  /** The number that this revision gets. */
  number: number;
  siteId: string;
  workerId: string;
  crewId: string | null;
  date: string;
  timeZone: string;
  localStart: string;
  lengthMin: number;
  startsAt: Date;
  unaccounted: Unaccounted;
  tasks: readonly ShiftTaskInput[];
  note: string | null;
  reason: string | null;
  isVoid?: boolean;
}

/**
 * Writes shifts as new heads or as next revisions, in a handful of statements however many they are, with an event each.
 * A head is only moved from the revision before: whoever comes second is refused.
 *
 * @returns shift ids in the order given
 */
export async function storeShifts(
  actor: Actor,
  entryId: string,
  shifts: readonly CheckedShift[],
): Promise<string[]> {
  if (shifts.length === 0) return [];
  const records = shifts.map((shift) => ({
    ...shift,
    isNew: shift.shiftId === null,
    shiftId: shift.shiftId ?? randomUUID(),
    revisionId: randomUUID(),
    startsAt: shift.startsAt.toISOString(),
    endsAt: new Date(shift.startsAt.getTime() + shift.lengthMin * 60_000).toISOString(),
    how: shift.unaccounted.how,
    quietDb: shift.unaccounted.how === "quiet" ? shift.unaccounted.levelDb : null,
    isVoid: shift.isVoid ?? false,
  }));
  const heads = JSON.stringify(records.map(({ tasks: _tasks, ...head }) => head));
  const columns = `AS x("isNew" boolean, "shiftId" uuid, "revisionId" uuid, number int, "siteId" uuid, "workerId" uuid, "crewId" uuid, date date, "timeZone" text,
    "localStart" time, "lengthMin" int, "startsAt" timestamptz, "endsAt" timestamptz, how text, "quietDb" float8, note text, reason text, "isVoid" boolean)`;
  await execute(
    `INSERT INTO shift_revisions (id, organization_id, shift_id, number, local_start, length_min, unaccounted_how, unaccounted_level_db, is_void, note, reason, entry_id, author_id)
     SELECT x."revisionId", $1, x."shiftId", x.number, x."localStart", x."lengthMin", x.how, x."quietDb", x."isVoid", x.note, x.reason, $3, $4
     FROM jsonb_to_recordset($2::jsonb) ${columns}`,
    [actor.organizationId, heads, entryId, actor.userId],
  );
  await execute(
    `INSERT INTO shifts (id, organization_id, site_id, worker_id, crew_id, date, local_start, time_zone, length_min, starts_at, ends_at, revision, current_revision_id)
     SELECT x."shiftId", $1, x."siteId", x."workerId", x."crewId", x.date, x."localStart", x."timeZone", x."lengthMin", x."startsAt", x."endsAt", x.number, x."revisionId"
     FROM jsonb_to_recordset($2::jsonb) ${columns} WHERE x."isNew"`,
    [actor.organizationId, heads],
  );
  if (records.some(({ isNew }) => !isNew)) {
    await execute(
      `UPDATE shifts s SET local_start = x."localStart", length_min = x."lengthMin", starts_at = x."startsAt", ends_at = x."endsAt", is_void = x."isVoid",
       revision = x.number, current_revision_id = x."revisionId"
     FROM jsonb_to_recordset($1::jsonb) ${columns} WHERE NOT x."isNew" AND s.id = x."shiftId" AND s.revision = x.number - 1`,
      [heads],
    );
  }
  const tasks = records.flatMap(({ shiftId, revisionId, tasks: ofShift }) =>
    ofShift.map((task, position) => ({ ...task, shiftId, revisionId, position })),
  );
  await execute(
    `INSERT INTO shift_tasks (organization_id, shift_id, shift_revision_id, position, task_id, duration_min, worn_pct, worn_is_shift_wide)
     SELECT $1, x."shiftId", x."revisionId", x.position, x."taskId", x."durationMin", x."wornPct", x."wornIsShiftWide"
     FROM jsonb_to_recordset($2::jsonb) AS x("shiftId" uuid, "revisionId" uuid, position int, "taskId" uuid, "durationMin" float8, "wornPct" float8, "wornIsShiftWide" boolean)`,
    [actor.organizationId, JSON.stringify(tasks)],
  );
  await execute(
    `INSERT INTO days (organization_id, worker_id, date, site_id, crew_id)
     SELECT DISTINCT ON (x."workerId", x.date) $1::uuid, x."workerId", x.date, x."siteId", x."crewId" FROM jsonb_to_recordset($2::jsonb) ${columns}
     ON CONFLICT (worker_id, date) DO UPDATE SET is_stale = TRUE`,
    [actor.organizationId, heads],
  );
  await recordAuditMany(
    actor,
    records.map(
      ({
        isNew,
        shiftId,
        number,
        workerId,
        date,
        localStart,
        lengthMin,
        unaccounted,
        tasks: ofShift,
        reason,
        isVoid,
      }) => ({
        action: isVoid ? "void-shift" : isNew ? "record-shift" : "correct-shift",
        subjectKind: "shift",
        subjectId: shiftId,
        values: {
          number,
          workerId,
          date,
          localStart,
          lengthMin,
          unaccounted,
          tasks: ofShift,
          reason,
        },
      }),
    ),
  );
  return records.map(({ shiftId }) => shiftId);
}
