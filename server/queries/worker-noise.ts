import { sumDay } from "../../shared/acoustics/day-sum";
import { lawOf, levelOfWeight } from "../../shared/acoustics/exchange-law";
import { outsideCriterion } from "../../shared/acoustics/outside-criterion";
import { isTooDeepForOwnFit, lcMinusLaDb } from "../../shared/acoustics/protection/attenuation";
import { attenuationNeed } from "../../shared/acoustics/protection/attenuation-need";
import type { DayInput, RuleSetVersion, TimedTask } from "../../shared/acoustics/types";
import { withTasks } from "../../shared/acoustics/with-tasks";
import type { AttenuationNeed } from "../../shared/schemas/fit";
import { rows } from "../lib/db";
import type { Worker } from "../models/worker";
import { gridTasks } from "./day-grid";
import { type DayRefs, hydrateDays } from "./day-inputs";
import { bareTask } from "./register-offers";
import { settingsInForce } from "./site-settings";

type Person = Pick<Worker, "id" | "siteId" | "jobId" | "mustWear" | "personalTargetDb">;

/** Days that say what a worker's noise is like now. Common practice, no source. */
const RECENT_DAYS = 20;
const RECENT_FOR_DAYS = 92;

export interface WorkerNoise {
  need: AttenuationNeed;
  governing: RuleSetVersion;
  /** The site credits an active part that was checked on its wearer. */
  creditsActivePart: boolean;
  /** The day that asks for most, under the rules of today; null: no noise is known. */
  day: DayInput | null;
  /** The task in it that does; null where the rule judges the shift. */
  task: TimedTask | null;
}

interface Asking {
  day: DayInput;
  task: TimedTask | null;
  outsideDb: number;
  /** Only a bound is known, from above. */
  isUpperBound: boolean;
}

/**
 * What a worker's noise asks of a protector under the rules in force: by the worker's own recent days, and where there is
 * none by the nominal day of the job. By EN 458 the loudest task in noise asks, by Appendix B the shift.
 *
 * @throws AppError not-computed, where the site has no rules on that date.
 */
export async function workerNoise(worker: Person, date: string): Promise<WorkerNoise> {
  const settings = await settingsInForce(worker.siteId, date);
  const { governing, creditsActivePart } = settings;
  const site = {
    wearFromDb: settings.wearFromDb,
    creditsActivePart,
    usesUncertainty: settings.usesUncertainty,
  };
  const judgedNow = (day: DayInput): DayInput => ({
    ...day,
    site,
    mustWear: worker.mustWear,
    personalTargetDb: worker.personalTargetDb,
  });
  const recent = await recentDays(worker.id, date);
  const days = recent.length > 0 ? recent : await nominalDay(worker, date, site);
  const [loudest] = days
    .flatMap((day) => askingOf(judgedNow(day), governing))
    .toSorted((a, b) => b.outsideDb - a.outsideDb);
  if (!loudest)
    return {
      need: unknown("no-noise"),
      governing,
      creditsActivePart,
      day: days[0] ? judgedNow(days[0]) : null,
      task: null,
    };
  const { day, task, outsideDb, isUpperBound } = loudest;
  const need = attenuationNeed(outsideDb, governing.protection, worker.personalTargetDb);
  const of = {
    outsideDb,
    isUpperBound,
    taskId: task?.taskId ?? null,
    taskName: task?.name ?? null,
    isTooDeepForOwnFit: isTooDeepForOwnFit(
      governing.protection,
      task?.level ? lcMinusLaDb(task.level) : null,
    ),
  };
  return {
    governing,
    creditsActivePart,
    day,
    task,
    need: need
      ? { ...need, ...of, reason: recent.length > 0 ? null : "nominal-day" }
      : { ...unknown("not-stated"), ...of },
  };
}

const unknown = (reason: string): AttenuationNeed => ({
  needDb: null,
  outsideDb: null,
  isUpperBound: false,
  targetDb: null,
  taskId: null,
  taskName: null,
  isTooDeepForOwnFit: false,
  mostDb: null,
  reason,
});

/** What in a day asks for a protector: each task, or the shift as a whole. */
function askingOf(day: DayInput, governing: RuleSetVersion): Asking[] {
  const { adequacy } = governing.protection;
  if (adequacy === "appendix-b") {
    const law = lawOf(outsideCriterion(governing));
    const { least, most, missing } = sumDay(bare(day), law);
    if (missing !== null || most <= 0 || !Number.isFinite(most)) return [];
    // What is enough is proved by the most that it can have been.
    const outsideDb = levelOfWeight(most / law.referenceMin, law);
    return [{ day, task: null, outsideDb, isUpperBound: least < most }];
  }
  return day.shifts.flatMap(({ tasks }) =>
    tasks.flatMap((task) =>
      task.level && task.durationMin > 0
        ? [{ day, task, outsideDb: task.level.levelDb, isUpperBound: false }]
        : [],
    ),
  );
}

const bare = (day: DayInput): DayInput => withTasks(day, (task) => ({ ...task, protection: null }));

async function recentDays(workerId: string, date: string): Promise<DayInput[]> {
  const found = await rows<{ workerId: string; date: string; refs: DayRefs }>(
    `SELECT d.worker_id AS "workerId", d.date::text AS date, r.refs FROM days d JOIN day_results r ON r.id = d.current_result_id
     WHERE d.worker_id = :workerId AND r.origin = 'computed' AND d.date <= CAST(:date AS date) AND d.date > CAST(:date AS date) - ${RECENT_FOR_DAYS}
     ORDER BY d.date DESC LIMIT ${RECENT_DAYS}`,
    { workerId, date },
  );
  return found.length === 0 ? [] : hydrateDays(found);
}

/** The job's nominal day with the levels of that date, as one shift; nothing where the worker has no job with tasks. */
async function nominalDay(
  worker: Person,
  date: string,
  site: DayInput["site"],
): Promise<DayInput[]> {
  if (worker.jobId === null) return [];
  const nominal = await rows<{ taskId: string; durationMin: number }>(
    `SELECT task_id AS "taskId", duration_min AS "durationMin" FROM job_tasks WHERE job_id = :jobId ORDER BY position`,
    { jobId: worker.jobId },
  );
  const known = new Map((await gridTasks(worker.siteId, date)).map((task) => [task.id, task]));
  const tasks = nominal.flatMap(({ taskId, durationMin }): TimedTask[] => {
    const task = known.get(taskId);
    return task ? [bareTask(task, durationMin)] : [];
  });
  if (tasks.length === 0) return [];
  return [
    {
      workerId: worker.id,
      date,
      shifts: [
        {
          id: worker.jobId,
          revisionId: null,
          lengthMin: tasks.reduce((sum, { durationMin }) => sum + durationMin, 0),
          tasks,
          unaccounted: { how: "unknown" },
          readings: [],
        },
      ],
      site,
      personalTargetDb: worker.personalTargetDb,
      mustWear: worker.mustWear,
    },
  ];
}
