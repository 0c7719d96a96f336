import type { z } from "zod";
import type { TaskLevel, Unaccounted } from "../../shared/acoustics/types";
import type { Attenuation } from "../../shared/schemas/evaluation";
import type { DayGridView, GridRow, ShiftTaskInput } from "../../shared/schemas/shift";
import { todayAt } from "../lib/calendar";
import { row, rows } from "../lib/db";
import type { Crew } from "../models/worker";
import { isAbsentOn } from "./attendance";
import { dayFiguresOf } from "./day-figures";
import { LEVEL_COLUMNS, PROTECTOR_COLUMNS, toProtector, toTaskLevel } from "./day-inputs";
import { entryNotices } from "./entry-notices";
import { activeCheckInForce, combinationInForce, fitInForce, wearingSeen } from "./own-attenuation";
import { presentSavedShift, readingsOfDay, savedShifts } from "./saved-shifts";
import { settingsInForce } from "./site-settings";

interface MemberRow {
  id: string;
  name: string;
  employeeNumber: string;
  mustWear: boolean;
  personalTargetDb: number | null;
  hiredOn: string;
  leftOn: string | null;
  employer: "own" | "agency" | "contractor";
  employerName: string | null;
  isLoan: boolean;
  isAbsent: boolean;
  /** On loan to this crew: from which, and the last day. */
  lentBy: { crewName: string | null; untilDate: string | null } | null;
  /** With another crew on the date, which this one lent them to. */
  lentTo: { crewName: string; untilDate: string | null } | null;
  nominal: { taskId: string; durationMin: number }[];
}

/** Everything that a crew's day is entered with: one answer, a fixed number of statements. */
export async function dayGrid(crew: Crew, date: string): Promise<DayGridView> {
  const site = await row<{ name: string; timeZone: string }>(
    `SELECT name, time_zone AS "timeZone" FROM sites WHERE id = :id`,
    { id: crew.siteId },
  );
  const belonging = await crewMembers(crew.id, date);
  const saved = await savedShifts("s.worker_id = ANY (CAST(:ids AS uuid[])) AND s.date = :date", {
    ids: `{${belonging.map(({ id }) => id).join(",")}}`,
    date,
  });
  // Whoever is lent to another crew is entered there, unless a shift here says otherwise.
  const members = belonging.filter(
    ({ id, lentTo }) =>
      lentTo === null || saved.some((shift) => shift.workerId === id && shift.crewId === crew.id),
  );
  const ids = `{${members.map(({ id }) => id).join(",")}}`;
  const [tasks, assignments, lastWorn, longest, lastShifts, readings, figures, instruments, entry] =
    [
      await gridTasks(crew.siteId, date),
      await assignmentsOn(ids, date),
      await lastWearing(ids, date),
      await longestStays(ids, date),
      await lastShiftsBefore(ids, crew.id, date),
      await readingsOfDay(
        members.map(({ id }) => id),
        date,
      ),
      await dayFiguresOf(
        members.map(({ id }) => id),
        date,
      ),
      await rows<DayGridView["instruments"][number]>(
        `SELECT id, name, serial_number AS "serialNumber", class, kind, presets FROM instruments WHERE site_id = :siteId AND NOT is_archived AND kind <> 'calibrator' ORDER BY name`,
        { siteId: crew.siteId },
      ),
      await latestEntry(crew.id, date),
    ];
  const settings = await settingsInForce(crew.siteId, date);
  const columns = new Set([
    ...members.flatMap(({ nominal }) => nominal.map(({ taskId }) => taskId)),
    ...saved
      .filter((shift) => shift.crewId === crew.id)
      .flatMap((shift) => shift.tasks.map(({ taskId }) => taskId)),
  ]);
  const modelIds = [
    ...new Set(
      assignments.flatMap(({ innerModelId, outerModelId }) => [innerModelId, outerModelId]),
    ),
  ].filter((id) => id !== null);

  return {
    crew: {
      id: crew.id,
      name: crew.name,
      siteId: crew.siteId,
      siteName: site?.name ?? "",
      usualStart: crew.usualStart.slice(0, 5),
      usualLengthMin: crew.usualLengthMin,
      timeZone: site?.timeZone ?? "UTC",
    },
    date,
    today: todayAt(site?.timeZone ?? "UTC"),
    settings: {
      governingRuleSet: settings.governingRuleSet,
      ruleSetVersion: settings.ruleSetVersion,
      comparisonRuleSets: settings.comparisonRuleSets,
      wearFromDb: settings.wearFromDb,
      creditsActivePart: settings.creditsActivePart,
      usesUncertainty: settings.usesUncertainty,
    },
    tasks: orderLikeNominal(
      tasks.map((task) => ({ ...task, isColumn: columns.has(task.id) })),
      members,
    ),
    models: await modelsOn(modelIds, date),
    instruments,
    rows: members.map((member): GridRow => {
      const { nominal, isLoan, isAbsent, id, name, employeeNumber } = member;
      const { mustWear, personalTargetDb, hiredOn, leftOn } = member;
      const worker = { id, name, employeeNumber, mustWear, personalTargetDb, hiredOn, leftOn };
      const own = saved.find((shift) => shift.workerId === worker.id && shift.crewId === crew.id);
      return {
        worker,
        isLoan,
        isAbsent,
        nominal,
        assignments: assignments
          .filter(({ workerId }) => workerId === worker.id)
          .map(({ workerId: _, ...assignment }) => assignment),
        lastWorn: lastWorn.get(worker.id) ?? {},
        longestMin: longest.get(worker.id) ?? {},
        saved: own ? presentSavedShift(own) : null,
        otherShifts: saved
          .filter((shift) => shift.workerId === worker.id && shift !== own)
          .map(({ shiftId, localStart, lengthMin }) => ({
            shiftId,
            crewName: null,
            localStart,
            lengthMin,
          })),
        readings: readings.get(worker.id) ?? [],
        lastShift: lastShifts.get(worker.id) ?? null,
        figures: figures.get(worker.id) ?? null,
      };
    }),
    notices: entry ? await entryNotices(entry) : null,
  };
}

/** Workers of a crew on a date, with the nominal day of their job. */
export async function crewMembers(crewId: string, date: string): Promise<MemberRow[]> {
  return rows<MemberRow>(
    `SELECT w.id, w.name, w.employee_number AS "employeeNumber", w.must_wear AS "mustWear", w.personal_target_db AS "personalTargetDb",
       w.hired_on::text AS "hiredOn", w.left_on::text AS "leftOn", m.is_loan AS "isLoan", w.employer, w.employer_name AS "employerName",
       ${isAbsentOn("w.id", "CAST(:date AS date)")} AS "isAbsent",
       CASE WHEN m.is_loan THEN json_build_object('untilDate', (upper(m.valid) - 1)::text, 'crewName', (SELECT min(c.name) FROM crew_memberships o JOIN crews c ON c.id = o.crew_id
         WHERE o.worker_id = w.id AND NOT o.is_loan AND o.valid @> CAST(:date AS date))) END AS "lentBy",
       CASE WHEN NOT m.is_loan THEN (SELECT json_build_object('untilDate', (upper(l.valid) - 1)::text, 'crewName', c.name) FROM crew_memberships l JOIN crews c ON c.id = l.crew_id
         WHERE l.worker_id = w.id AND l.is_loan AND l.crew_id <> m.crew_id AND l.valid @> CAST(:date AS date) ORDER BY c.name LIMIT 1) END AS "lentTo",
       coalesce((SELECT json_agg(json_build_object('taskId', j.task_id, 'durationMin', j.duration_min) ORDER BY j.position)
                 FROM job_tasks j WHERE j.job_id = w.job_id), '[]') AS nominal
     FROM crew_memberships m JOIN workers w ON w.id = m.worker_id
     WHERE m.crew_id = :crewId AND m.valid @> CAST(:date AS date) AND (w.left_on IS NULL OR w.left_on >= CAST(:date AS date))
     ORDER BY w.employee_number, w.id`,
    { crewId, date },
  );
}

interface TaskRow {
  id: string;
  name: string;
  areaId: string | null;
  zone: "none" | "single" | "double";
  level: Parameters<typeof toTaskLevel>[0] | null;
}

/** A site's tasks with the level in force on a date. */
export async function gridTasks(
  siteId: string,
  date: string,
): Promise<
  {
    id: string;
    name: string;
    areaId: string | null;
    zone: TaskRow["zone"];
    level: TaskLevel | null;
  }[]
> {
  const found = await rows<TaskRow>(
    `SELECT k.id, k.name, k.area_id AS "areaId", coalesce(a.zone, 'none') AS zone, (SELECT to_jsonb(x) FROM (
        SELECT ${LEVEL_COLUMNS("l")} FROM task_levels l WHERE l.task_id = k.id AND l.effective_from <= :date
        ORDER BY l.effective_from DESC, l.number DESC LIMIT 1) x) AS level
     FROM tasks k LEFT JOIN areas a ON a.id = k.area_id WHERE k.site_id = :siteId AND NOT k.is_archived ORDER BY k.name`,
    { siteId, date },
  );
  return found.map(({ level, ...task }) => ({ ...task, level: level ? toTaskLevel(level) : null }));
}

export interface AssignmentOn {
  id: string;
  workerId: string;
  taskId: string | null;
  areaId: string | null;
  innerModelId: string;
  outerModelId: string | null;
  ownFitDb: number | null;
  activeCheckPassed: boolean;
  combinationBands: z.infer<typeof Attenuation> | null;
  audioDb: number | null;
}

export async function assignmentsOn(workerIds: string, date: string): Promise<AssignmentOn[]> {
  return rows<AssignmentOn>(
    `SELECT a.id, a.worker_id AS "workerId", a.task_id AS "taskId", a.area_id AS "areaId", a.inner_model_id AS "innerModelId", a.outer_model_id AS "outerModelId",
       a.audio_db AS "audioDb", fit.par_db AS "ownFitDb", coalesce(active.active_passed, FALSE) AS "activeCheckPassed", pair.bands AS "combinationBands"
     FROM assignments a
     LEFT JOIN fit_test_revisions fit ON a.outer_model_id IS NULL AND fit.id = ${fitInForce("a.worker_id", "a.inner_model_id", "a.size", "CAST(:date AS date)")}
     LEFT JOIN fit_test_revisions active ON a.outer_model_id IS NULL AND active.id = ${activeCheckInForce("a.worker_id", "a.inner_model_id", "a.size", "CAST(:date AS date)")}
     LEFT JOIN protector_combinations pair ON pair.id = ${combinationInForce("a.inner_model_id", "a.outer_model_id", "CAST(:date AS date)")}
     WHERE a.worker_id = ANY (CAST(:ids AS uuid[])) AND a.valid @> CAST(:date AS date)`,
    { ids: workerIds, date },
  );
}

export async function modelsOn(modelIds: readonly string[], date: string) {
  const found =
    modelIds.length === 0
      ? []
      : await rows<Parameters<typeof toProtector>[0]>(
          `SELECT DISTINCT ON (m.id) ${PROTECTOR_COLUMNS} FROM protector_models m JOIN protector_model_revisions p ON p.model_id = m.id AND p.effective_from <= :date
     WHERE m.id = ANY (CAST(:ids AS uuid[])) ORDER BY m.id, p.effective_from DESC, p.number DESC`,
          { ids: `{${modelIds.join(",")}}`, date },
        );
  return found.map(toProtector);
}

/** The wearing time that a task is entered with unless somebody says otherwise. */
export async function lastWearing(
  ids: string,
  date: string,
): Promise<Map<string, Record<string, number>>> {
  const typed = await rows<{ workerId: string; taskId: string; wornPct: number }>(
    `SELECT DISTINCT ON (s.worker_id, t.task_id) s.worker_id AS "workerId", t.task_id AS "taskId", t.worn_pct AS "wornPct"
     FROM shifts s JOIN shift_tasks t ON t.shift_revision_id = s.current_revision_id
     WHERE s.worker_id = ANY (CAST(:ids AS uuid[])) AND s.date < CAST(:date AS date) AND s.date >= CAST(:date AS date) - 92 AND NOT s.is_void AND t.worn_pct IS NOT NULL
     ORDER BY s.worker_id, t.task_id, s.date DESC`,
    { ids, date },
  );
  const looked = await rows<{ workerId: string; taskId: string; seen: [number, number] }>(
    `SELECT x.worker_id AS "workerId", x.task_id AS "taskId", ${wearingSeen("x.worker_id", "x.task_id", "CAST(:date AS date)")} AS seen
     FROM (SELECT DISTINCT worker_id, task_id FROM wearing_looks WHERE worker_id = ANY (CAST(:ids AS uuid[]))) x`,
    { ids, date },
  );
  const seenPct = looked.flatMap(({ workerId, taskId, seen }) =>
    seen ? [{ workerId, taskId, wornPct: (100 * seen[0]) / seen[1] }] : [],
  );
  return nest(
    // What was seen comes before what was typed.
    [...typed, ...seenPct],
    ({ workerId }) => workerId,
    ({ taskId, wornPct }) => [taskId, wornPct],
  );
}

async function longestStays(
  ids: string,
  date: string,
): Promise<Map<string, Record<string, number>>> {
  const found = await rows<{ workerId: string; taskId: string; longestMin: number }>(
    `SELECT s.worker_id AS "workerId", t.task_id AS "taskId", max(t.duration_min) AS "longestMin"
     FROM shifts s JOIN shift_tasks t ON t.shift_revision_id = s.current_revision_id
     WHERE s.worker_id = ANY (CAST(:ids AS uuid[])) AND s.date < CAST(:date AS date) AND s.date >= CAST(:date AS date) - 366 AND NOT s.is_void
     GROUP BY s.worker_id, t.task_id`,
    { ids, date },
  );
  return nest(
    found,
    ({ workerId }) => workerId,
    ({ taskId, longestMin }) => [taskId, longestMin],
  );
}

function nest<Row>(
  found: readonly Row[],
  outer: (row: Row) => string,
  entry: (row: Row) => [string, number],
): Map<string, Record<string, number>> {
  const result = new Map<string, Record<string, number>>();
  for (const one of found) {
    const [key, value] = entry(one);
    result.set(outer(one), { ...result.get(outer(one)), [key]: value });
  }
  return result;
}

interface LastShiftRow {
  workerId: string;
  date: string;
  localStart: string;
  lengthMin: number;
  how: Unaccounted["how"];
  quietDb: number | null;
  tasks: ShiftTaskInput[];
}

async function lastShiftsBefore(
  ids: string,
  crewId: string,
  date: string,
): Promise<Map<string, NonNullable<GridRow["lastShift"]>>> {
  const found = await rows<LastShiftRow>(
    `SELECT w.id AS "workerId", s.date::text AS date, to_char(v.local_start, 'HH24:MI') AS "localStart", v.length_min AS "lengthMin",
       v.unaccounted_how AS how, v.unaccounted_level_db AS "quietDb",
       coalesce((SELECT json_agg(json_build_object('taskId', t.task_id, 'durationMin', t.duration_min, 'wornPct', t.worn_pct, 'wornIsShiftWide', t.worn_is_shift_wide) ORDER BY t.position)
                 FROM shift_tasks t WHERE t.shift_revision_id = v.id), '[]') AS tasks
     FROM unnest(CAST(:ids AS uuid[])) AS w(id)
     JOIN LATERAL (SELECT * FROM shifts x WHERE x.worker_id = w.id AND x.date < CAST(:date AS date) AND x.crew_id = :crewId AND NOT x.is_void ORDER BY x.date DESC LIMIT 1) s ON TRUE
     JOIN shift_revisions v ON v.id = s.current_revision_id`,
    { ids, crewId, date },
  );
  return new Map(
    found.map(({ workerId, how, quietDb, ...shift }) => [
      workerId,
      { ...shift, unaccounted: how === "quiet" ? { how, levelDb: quietDb! } : { how } },
    ]),
  );
}

async function latestEntry(crewId: string, date: string): Promise<string | null> {
  const found = await row<{ entryId: string }>(
    `SELECT n.entry_id AS "entryId" FROM notices n JOIN notice_items i ON i.notice_id = n.id JOIN days d ON d.worker_id = i.worker_id AND d.date = i.date
     WHERE d.crew_id = :crewId AND d.date = :date AND n.state <> 'withdrawn' ORDER BY n.created_at DESC LIMIT 1`,
    { crewId, date },
  );
  return found?.entryId ?? null;
}

/** The order of the day's work where the jobs give one; other tasks by name behind. */
function orderLikeNominal<T extends { id: string; name: string }>(
  tasks: T[],
  members: readonly MemberRow[],
): T[] {
  const place = new Map<string, number>();
  for (const { nominal } of members) {
    for (const [index, { taskId }] of nominal.entries()) {
      place.set(taskId, Math.min(place.get(taskId) ?? index, index));
    }
  }
  const last = Number.MAX_SAFE_INTEGER;
  return tasks.toSorted(
    (a, b) => (place.get(a.id) ?? last) - (place.get(b.id) ?? last) || a.name.localeCompare(b.name),
  );
}
