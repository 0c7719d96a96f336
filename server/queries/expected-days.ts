import { evaluateDay } from "../../shared/acoustics/day";
import { buildDayInput, type DayContext } from "../../shared/day/build-day-input";
import { type DaySummary, summarizeDay } from "../../shared/day/summarize-day";
import type { ExpectedDay } from "../../shared/findings/expected";
import { rows } from "../lib/db";
import { assignmentsOn, gridTasks, lastWearing, modelsOn } from "./day-grid";
import type { SettingsInForce } from "./site-settings";

/** Somebody of a site, with the nominal day of their job. */
export interface Expected {
  readonly id: string;
  readonly mustWear: boolean;
  readonly personalTargetDb: number | null;
  readonly nominal: readonly { taskId: string; durationMin: number }[];
  /** How long the shift usually is, minutes; a nominal day that is longer is the shift. */
  readonly usualLengthMin: number;
}

/** Whose usual day it is, and where. */
export interface PersonExpected extends Expected {
  readonly siteId: string;
  /** ISO date at the site. */
  readonly today: string;
  /** The crew they work in, on loan or not. */
  readonly crewId: string | null;
}

/** These workers with their nominal days, and the crew they are in on a date; today where none is given. */
export function peopleExpected(
  workerIds: readonly string[],
  date: string | null = null,
): Promise<PersonExpected[]> {
  return rows<PersonExpected>(
    `SELECT w.id, w.site_id AS "siteId", now.today::text AS today, w.must_wear AS "mustWear", w.personal_target_db AS "personalTargetDb",
       coalesce((SELECT json_agg(json_build_object('taskId', j.task_id, 'durationMin', j.duration_min) ORDER BY j.position)
                 FROM job_tasks j WHERE j.job_id = w.job_id), '[]') AS nominal,
       crew.id AS "crewId", coalesce(crew.usual_length_min, 0) AS "usualLengthMin"
     FROM workers w JOIN sites s ON s.id = w.site_id
     CROSS JOIN LATERAL (SELECT (now() AT TIME ZONE s.time_zone)::date AS today) now
     LEFT JOIN LATERAL (SELECT c.id, c.usual_length_min FROM crew_memberships m JOIN crews c ON c.id = m.crew_id
       WHERE m.worker_id = w.id AND m.valid @> coalesce(CAST(:date AS date), now.today) ORDER BY m.is_loan, lower(m.valid) DESC LIMIT 1) crew ON TRUE
     WHERE w.id = ANY (CAST(:ids AS uuid[]))`,
    { ids: `{${workerIds.join(",")}}`, date },
  );
}

/** What these people's nominal days come to, as a list row shows it; see `evaluateExpected`. */
export async function expectedDays(
  siteId: string,
  date: string,
  people: readonly Expected[],
  settings: SettingsInForce,
): Promise<Map<string, DaySummary>> {
  const days = await evaluateExpected(siteId, date, people, settings);
  return new Map([...days].map(([workerId, day]) => [workerId, summarizeExpected(day)]));
}

export const summarizeExpected = ({ input, evaluation, governing }: ExpectedDay): DaySummary =>
  summarizeDay(input, evaluation, governing);

/** What a day of these people is computed with as it usually is: levels of tasks, what is assigned, and how long it was worn last. */
export async function usualContext(
  siteId: string,
  date: string,
  workerIds: readonly string[],
  { wearFromDb, creditsActivePart, usesUncertainty }: SettingsInForce,
) {
  const ids = `{${workerIds.join(",")}}`;
  const assignments = await assignmentsOn(ids, date);
  const worn = await lastWearing(ids, date);
  const modelIds = assignments.flatMap(({ innerModelId, outerModelId }) =>
    outerModelId ? [innerModelId, outerModelId] : [innerModelId],
  );
  const models = await modelsOn([...new Set(modelIds)], date);
  const context: DayContext = {
    tasks: new Map((await gridTasks(siteId, date)).map((task) => [task.id, task])),
    models: new Map(models.map((model) => [model.modelId, model])),
    site: { wearFromDb, creditsActivePart, usesUncertainty },
  };
  return { assignments, worn, context };
}

/**
 * These people's nominal days, evaluated for a date by the usual levels of the tasks and what is assigned then, by worker.
 * Nothing is expected of whoever has no nominal day. A fixed number of statements.
 */
export async function evaluateExpected(
  siteId: string,
  date: string,
  people: readonly Expected[],
  settings: SettingsInForce,
): Promise<Map<string, ExpectedDay>> {
  const { governing } = settings;
  const { assignments, worn, context } = await usualContext(
    siteId,
    date,
    people.map(({ id }) => id),
    settings,
  );
  return new Map(
    people.flatMap((person): [string, ExpectedDay][] => {
      if (person.nominal.length === 0) return [];
      const tasks = person.nominal.map(({ taskId, durationMin }) => ({
        taskId,
        durationMin,
        wornPct: worn.get(person.id)?.[taskId] ?? null,
        wornIsShiftWide: false,
      }));
      const nominalMin = tasks.reduce((sum, { durationMin }) => sum + durationMin, 0);
      const shift = {
        id: "expected",
        lengthMin: Math.max(person.usualLengthMin, nominalMin),
        tasks,
        unaccounted: { how: "like-the-rest" } as const,
        readings: [],
      };
      const input = buildDayInput(
        person,
        date,
        [shift],
        assignments.filter(({ workerId }) => workerId === person.id),
        context,
      );
      return [[person.id, { input, evaluation: evaluateDay(input, governing, []), governing }]];
    }),
  );
}
