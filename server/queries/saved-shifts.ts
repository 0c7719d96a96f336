import type { MeterSettings, Unaccounted } from "../../shared/acoustics/types";
import type { GridRun, SavedShift, ShiftTaskInput } from "../../shared/schemas/shift";
import { atLocalTime } from "../../shared/time/zone";
import { leftOutIn, type StoredLeftOut } from "../histories/left-out";
import { rows } from "../lib/db";
import { IS_OF_DAY, instrumentClass } from "./day-inputs";

export interface SavedShiftRow {
  shiftId: string;
  workerId: string;
  crewId: string | null;
  date: string;
  timeZone: string;
  startsAt: Date;
  revision: number;
  localStart: string;
  lengthMin: number;
  how: Unaccounted["how"];
  quietDb: number | null;
  note: string | null;
  authorName: string | null;
  savedAt: Date;
  tasks: ShiftTaskInput[];
}

/** Current shifts with their tasks; `condition` is on the head `s`. */
export async function savedShifts(
  condition: string,
  replacements: Record<string, unknown>,
): Promise<SavedShiftRow[]> {
  return rows<SavedShiftRow>(
    `SELECT s.id AS "shiftId", s.worker_id AS "workerId", s.crew_id AS "crewId", s.date::text AS date, s.time_zone AS "timeZone", s.starts_at AS "startsAt",
       s.revision, to_char(v.local_start, 'HH24:MI') AS "localStart", v.length_min AS "lengthMin", v.unaccounted_how AS how, v.unaccounted_level_db AS "quietDb",
       v.note, u.name AS "authorName", v.created_at AS "savedAt",
       coalesce((SELECT json_agg(json_build_object('taskId', t.task_id, 'durationMin', t.duration_min, 'wornPct', t.worn_pct, 'wornIsShiftWide', t.worn_is_shift_wide) ORDER BY t.position)
                 FROM shift_tasks t WHERE t.shift_revision_id = v.id), '[]') AS tasks
     FROM shifts s JOIN shift_revisions v ON v.id = s.current_revision_id LEFT JOIN users u ON u.id = v.author_id
     WHERE NOT s.is_void AND ${condition} ORDER BY s.worker_id, s.date, s.starts_at`,
    replacements,
  );
}

export function presentSavedShift(row: SavedShiftRow): SavedShift {
  const local = atLocalTime(row.date, row.localStart, row.timeZone);
  return {
    shiftId: row.shiftId,
    revision: row.revision,
    localStart: row.localStart,
    whichHour:
      local.kind === "twice"
        ? local.first.getTime() === row.startsAt.getTime()
          ? "first"
          : "second"
        : null,
    lengthMin: row.lengthMin,
    unaccounted: row.how === "quiet" ? { how: "quiet", levelDb: row.quietDb! } : { how: row.how },
    tasks: row.tasks,
    note: row.note,
    authorName: row.authorName,
    savedAt: row.savedAt.toISOString(),
  };
}

interface GridRunRow extends MeterSettings {
  workerId: string;
  runId: string;
  runRevision: number;
  readingId: string;
  instrumentId: string;
  kind: string;
  class: string;
  durationMin: number;
  source: string;
  storedLeftOut: StoredLeftOut | null;
  shiftFromMs: number | null;
  shiftToMs: number | null;
  covers: GridRun["covers"];
  keptReason: string | null;
  dosePct: number | null;
  averageDb: number | null;
  lceqDb: number | null;
  lasMaxDb: number | null;
  peakDb: number | null;
  peakWeighting: "A" | "C" | "Z" | null;
}

const shiftOf = ({ shiftFromMs, shiftToMs }: GridRunRow) =>
  shiftFromMs === null || shiftToMs === null ? null : { fromMs: shiftFromMs, toMs: shiftToMs };

/** Readings of personal runs on a date, by worker. */
export async function readingsOfDay(
  workerIds: readonly string[],
  date: string,
): Promise<Map<string, GridRun[]>> {
  const found =
    workerIds.length === 0
      ? []
      : await rows<GridRunRow>(
          `SELECT r.worker_id AS "workerId", r.id AS "runId", r.revision AS "runRevision", g.id AS "readingId", r.instrument_id AS "instrumentId", i.kind, i.class,
       v.duration_min AS "durationMin", v.covers, v.kept_reason AS "keptReason", g.criterion_level_db AS "criterionLevelDb", g.exchange_rate_db AS "exchangeRateDb",
       g.threshold_db AS "thresholdDb", g.weighting, g.response, g.dose_pct AS "dosePct", g.average_db AS "averageDb", g.lceq_db AS "lceqDb",
       g.las_max_db AS "lasMaxDb", g.peak_db AS "peakDb", g.peak_weighting AS "peakWeighting", g.source, v.left_out AS "storedLeftOut",
       s.from_ms AS "shiftFromMs", s.to_ms AS "shiftToMs"
     FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id JOIN readings g ON g.run_revision_id = v.id JOIN instruments i ON i.id = r.instrument_id
     LEFT JOIN LATERAL (SELECT (1000 * extract(epoch FROM s.starts_at))::float8 AS from_ms, (1000 * extract(epoch FROM s.ends_at))::float8 AS to_ms FROM shifts s
       WHERE s.worker_id = r.worker_id AND s.date = r.date AND NOT s.is_void AND (r.shift_id IS NULL OR s.id = r.shift_id) ORDER BY s.starts_at LIMIT 1) s ON TRUE
     WHERE r.worker_id = ANY (CAST(:workerIds AS uuid[])) AND r.date = :date AND ${IS_OF_DAY} ORDER BY r.id, g.position`,
          { workerIds: `{${workerIds.join(",")}}`, date },
        );
  const byWorker = new Map<string, GridRun[]>();
  for (const row of found) {
    const {
      criterionLevelDb,
      exchangeRateDb,
      thresholdDb,
      weighting,
      response,
      peakDb,
      peakWeighting,
    } = row;
    const stored = row.source === "history" ? row.storedLeftOut : null;
    const leftOut = stored && leftOutIn(stored, shiftOf(row));
    const reading: GridRun = {
      runId: row.runId,
      runRevision: row.runRevision,
      readingId: row.readingId,
      instrumentId: row.instrumentId,
      instrumentClass: instrumentClass(row.kind, row.class),
      durationMin: row.durationMin,
      ...(stored && { countedMin: stored.countedMin }),
      ...(leftOut && { leftOut }),
      covers: row.covers,
      keptReason: row.keptReason,
      settings: {
        criterionLevelDb,
        exchangeRateDb: exchangeRateDb as 3 | 4 | 5,
        thresholdDb,
        weighting,
        response,
      },
      dosePct: row.dosePct,
      averageDb: row.averageDb,
      lceqDb: row.lceqDb,
      lasMaxDb: row.lasMaxDb,
      peak:
        peakDb === null || peakWeighting === null
          ? null
          : { levelDb: peakDb, weighting: peakWeighting },
    };
    byWorker.set(row.workerId, [...(byWorker.get(row.workerId) ?? []), reading]);
  }
  return byWorker;
}
