import type { z } from "zod";
import type { ShiftTaskInput, ShiftView } from "../../shared/schemas/shift";
import { atLocalTime } from "../../shared/time/zone";
import { row, rows } from "../lib/db";
import type { Actor } from "../lib/policy";
import { abilities } from "../lib/policy";
import type { Shift } from "../models/shift";
import { shiftPolicy } from "../policies";

interface RevisionRow {
  number: number;
  localStart: string;
  reason: string | null;
  authorName: string | null;
  at: Date;
  lengthMin: number;
  how: "unknown" | "like-the-rest" | "quiet";
  quietDb: number | null;
  note: string | null;
  isVoid: boolean;
  tasks: (ShiftTaskInput & { taskName: string })[];
}

/** A shift as it stands and every revision before it. */
export async function shiftView(actor: Actor, shift: Shift): Promise<z.input<typeof ShiftView>> {
  const worker = await row<{ name: string }>("SELECT name FROM workers WHERE id = :id", {
    id: shift.workerId,
  });
  const revisions = await rows<RevisionRow>(
    `SELECT v.number, to_char(v.local_start, 'HH24:MI') AS "localStart", v.reason, u.name AS "authorName", v.created_at AS at, v.length_min AS "lengthMin",
       v.unaccounted_how AS how, v.unaccounted_level_db AS "quietDb", v.note, v.is_void AS "isVoid",
       coalesce((SELECT json_agg(json_build_object('taskId', t.task_id, 'taskName', k.name, 'durationMin', t.duration_min, 'wornPct', t.worn_pct,
                 'wornIsShiftWide', t.worn_is_shift_wide) ORDER BY t.position) FROM shift_tasks t JOIN tasks k ON k.id = t.task_id WHERE t.shift_revision_id = v.id), '[]') AS tasks
     FROM shift_revisions v LEFT JOIN users u ON u.id = v.author_id WHERE v.shift_id = :id ORDER BY v.number DESC`,
    { id: shift.id },
  );
  const current = revisions[0] as RevisionRow;
  const local = atLocalTime(shift.date, current.localStart, shift.timeZone);
  return {
    shiftId: shift.id,
    revision: shift.revision,
    localStart: current.localStart,
    whichHour:
      local.kind === "twice"
        ? local.first.getTime() === shift.startsAt.getTime()
          ? "first"
          : "second"
        : null,
    lengthMin: current.lengthMin,
    unaccounted:
      current.how === "quiet" ? { how: "quiet", levelDb: current.quietDb! } : { how: current.how },
    tasks: current.tasks,
    note: current.note,
    authorName: current.authorName,
    savedAt: current.at.toISOString(),
    workerId: shift.workerId,
    workerName: worker?.name ?? "",
    date: shift.date,
    timeZone: shift.timeZone,
    crewId: shift.crewId,
    isVoid: shift.isVoid,
    revisions: revisions.map(({ number, reason, authorName, at, lengthMin, tasks, isVoid }) => ({
      number,
      reason,
      authorName,
      at: at.toISOString(),
      lengthMin,
      tasks,
      isVoid,
    })),
    can: abilities(shiftPolicy, actor, shift),
  };
}
