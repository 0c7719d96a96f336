import { evaluateDay } from "../../shared/acoustics/day";
import { countsAsWorn } from "../../shared/acoustics/protection/at-ear";
import { labelLess7Db, lcMinusLaDb } from "../../shared/acoustics/protection/attenuation";
import { everyMethod } from "../../shared/acoustics/protection/every-method";
import { mostAudioDb } from "../../shared/acoustics/protection/most-audio";
import type {
  BandAttenuation,
  DayInput,
  Protection,
  ProtectorData,
  RuleSetVersion,
  TaskLevel,
  TimedTask,
  Zone,
} from "../../shared/acoustics/types";
import { type LimitAtEar, limitAtEar } from "../../shared/rule-sets";
import type { AtEarView, NominalDayAtEar } from "../../shared/schemas/at-ear";
import { todayAt } from "../lib/calendar";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import type { ProtectorModel } from "../models/protector";
import type { Task } from "../models/task";
import type { Worker } from "../models/worker";
import { LEVEL_COLUMNS, toProtector, toTaskLevel } from "./day-inputs";
import { activeCheckInForce, combinationInForce, fitInForce } from "./own-attenuation";
import { listProtectorRevisions } from "./protectors";
import { settingsInForce } from "./site-settings";

/** A task belongs to no more jobs than that at any site we know. */
const MOST_JOBS = 50;

interface Asked {
  task: Task;
  inner: ProtectorModel;
  outer: ProtectorModel | null;
  worker: Worker | null;
}

/**
 * A protector, or two, in a task's noise by every method, and over the nominal days in which that task is done, with
 * what is known and in force today. A fixed number of statements.
 *
 * @throws AppError not-computed, where the site has no rules today.
 */
export async function atEar({ task, inner, outer, worker }: Asked): Promise<AtEarView> {
  const site = only(
    await rows<{ name: string; timeZone: string }>(
      `SELECT name, time_zone AS "timeZone" FROM sites WHERE id = :siteId`,
      { siteId: task.siteId },
    ),
  );
  const date = todayAt(site.timeZone);
  const settings = await settingsInForce(task.siteId, date);
  const { governing: ruleSet } = settings;
  const protectors = await dataOf(outer ? [inner, outer] : [inner]);
  const own = worker ? await knownOf(worker.id, inner.id, outer?.id ?? null, date) : null;
  const protection: Protection = {
    assignmentId: null,
    inner: only(protectors.filter(({ modelId }) => modelId === inner.id)),
    outer: protectors.find(({ modelId }) => modelId === outer?.id) ?? null,
    combinationBands: outer ? await combinationOf(inner.id, outer.id, date) : null,
    ownFitDb: own?.ownFitDb ?? null,
    activeCheckPassed: own?.activeCheckPassed ?? false,
  };
  const jobs = await jobsWith(task, worker);
  const tasks = await tasksOf(
    [task.id, ...jobs.flatMap((job) => job.tasks.map((t) => t.taskId))],
    date,
  );
  const level = tasks.get(task.id)?.level ?? null;
  const dayOf = (ofDay: TimedTask[], mustWear: boolean): DayInput => ({
    workerId: worker?.id ?? "",
    date,
    shifts: [
      {
        id: "nominal",
        revisionId: null,
        lengthMin: ofDay.reduce((sum, { durationMin }) => sum + durationMin, 0),
        tasks: ofDay,
        unaccounted: { how: "unknown" },
        readings: [],
      },
    ],
    site: {
      wearFromDb: settings.wearFromDb,
      creditsActivePart: settings.creditsActivePart,
      usesUncertainty: settings.usesUncertainty,
    },
    personalTargetDb: worker?.personalTargetDb ?? null,
    mustWear,
  });
  const timed = (taskId: string, durationMin: number): TimedTask[] => {
    const found = tasks.get(taskId);
    return found
      ? [
          {
            id: taskId,
            taskId,
            name: found.name,
            durationMin,
            level: found.level,
            zone: found.zone,
            protection,
            wornPct: 100,
            wornIsShiftWide: false,
          },
        ]
      : [];
  };
  // Whether it has to be worn there is another question: what it would do is asked.
  const alone = evaluateDay(dayOf(timed(task.id, 60), true), ruleSet, []);
  const limit = limitAtEar(ruleSet, worker?.personalTargetDb ?? null);
  const seen = level ? everyMethod(level, protection, ruleSet.protection) : null;
  const worn = alone.tasks[0];
  return {
    task: { id: task.id, name: task.name, siteId: task.siteId, siteName: site.name },
    level: level && {
      levelDb: level.levelDb,
      lcMinusLaDb: lcMinusLaDb(level),
      octaveBandsDb: level.octaveBandsDb,
    },
    inner: {
      modelId: inner.id,
      name: inner.name,
      kind: protection.inner.kind,
      bands: protection.inner.bands,
      active: protection.inner.active,
    },
    outer: outer && { modelId: outer.id, name: outer.name },
    worker: worker &&
      own && {
        id: worker.id,
        name: worker.name,
        ...own,
        labelLess7Db: outer ? null : labelLess7Db(protection.inner, ruleSet.protection),
      },
    ruleSetKey: ruleSet.key,
    ruleSetVersion: ruleSet.version,
    creditsActivePart: settings.creditsActivePart,
    methods: seen ? [...seen.methods] : [],
    spreadDb: seen?.spreadDb ?? null,
    isSpreadLarge: seen?.isSpreadLarge ?? false,
    whileWorn: {
      offDb: worn?.wornDb ?? null,
      onDb: worn?.wornActiveDb ?? null,
      mostDb: worn?.wornRangeDb?.mostDb ?? null,
      word: worn?.word ?? null,
      wordOn: worn?.wordActive ?? null,
      reason: worn?.reason ?? null,
    },
    limit: limit && { levelDb: limit.levelDb, kind: limit.kind },
    days: jobs.map((job) => {
      const ofDay = job.tasks.flatMap(({ taskId, durationMin }) => timed(taskId, durationMin));
      return {
        jobId: job.id,
        jobName: job.name,
        ...nominalDay(dayOf(ofDay, worker?.mustWear ?? false), ruleSet, limit),
      };
    }),
  };
}

function nominalDay(
  day: DayInput,
  ruleSet: RuleSetVersion,
  limit: LimitAtEar | null,
): Omit<NominalDayAtEar, "jobId" | "jobName"> {
  const { tasks, lengthMin } = only([...day.shifts]);
  const wornMin = tasks.reduce(
    (sum, task) => sum + (countsAsWorn(task, day) ? task.durationMin : 0),
    0,
  );
  const { atEarDb, atEarBound, atEarActiveDb, atEarAsWorkedDb } = evaluateDay(day, ruleSet, []);
  const mostDb = limit && mostAudioDb(day, ruleSet, limit.levelDb, limit.comparator);
  const why = (): NominalDayAtEar["audioReason"] => {
    if (!limit) return "no-limit";
    if (wornMin === 0) return "not-worn";
    return atEarDb === null || atEarBound !== "exact" ? "level-open" : "past-limit";
  };
  return {
    lengthMin,
    wornMin,
    atEarDb,
    atEarBound,
    atEarActiveDb,
    atEarAsWorkedDb,
    mostAudioDb: mostDb,
    audioReason: mostDb === null ? why() : null,
  };
}

/** With the data in force; a model whose first data hold from a later day on with those, as its page shows it. */
async function dataOf(models: readonly ProtectorModel[]): Promise<ProtectorData[]> {
  const revisions = await listProtectorRevisions(
    models.map(({ id }) => id),
    "in-force",
  );
  return revisions.map(({ id, modelId, data }) => {
    const { name, kind } = only(models.filter((model) => model.id === modelId));
    return toProtector({ id, modelId, name, kind: kind as ProtectorData["kind"], data });
  });
}

async function combinationOf(
  innerId: string,
  outerId: string,
  date: string,
): Promise<BandAttenuation | null> {
  const [found] = await rows<{ bands: BandAttenuation }>(
    `SELECT c.bands FROM protector_combinations c
     WHERE c.id = ${combinationInForce("CAST(:innerId AS uuid)", "CAST(:outerId AS uuid)", "CAST(:date AS date)")}`,
    { innerId, outerId, date },
  );
  return found?.bands ?? null;
}

type Known = Pick<NonNullable<AtEarView["worker"]>, "ownFitDb" | "activeCheckPassed" | "audioDb">;

/** What is known of it on this worker; a fit of one says nothing of two worn together. */
async function knownOf(
  workerId: string,
  innerId: string,
  outerId: string | null,
  date: string,
): Promise<Known> {
  return only(
    await rows<Known>(
      `SELECT fit.par_db AS "ownFitDb", coalesce(checked.active_passed, FALSE) AS "activeCheckPassed", a.audio_db AS "audioDb"
       FROM (SELECT CAST(:workerId AS uuid) AS worker_id, CAST(:innerId AS uuid) AS inner_id, CAST(:outerId AS uuid) AS outer_id, CAST(:date AS date) AS date) x
       LEFT JOIN LATERAL (SELECT s.size, s.audio_db FROM assignments s
         WHERE s.worker_id = x.worker_id AND s.inner_model_id = x.inner_id AND s.outer_model_id IS NOT DISTINCT FROM x.outer_id AND s.valid @> x.date
         ORDER BY (s.task_id IS NULL AND s.area_id IS NULL) DESC, s.id LIMIT 1) a ON TRUE
       LEFT JOIN fit_test_revisions fit ON x.outer_id IS NULL AND fit.id = ${fitInForce("x.worker_id", "x.inner_id", "a.size", "x.date")}
       LEFT JOIN fit_test_revisions checked ON x.outer_id IS NULL AND checked.id = ${activeCheckInForce("x.worker_id", "x.inner_id", "a.size", "x.date")}`,
      { workerId, innerId, outerId, date },
    ),
  );
}

interface JobRow {
  id: string;
  name: string;
  tasks: { taskId: string; durationMin: number }[];
}

/** The jobs whose nominal day has the task; for a worker the worker's own, whatever it has. */
function jobsWith(task: Task, worker: Worker | null): Promise<JobRow[]> {
  return rows<JobRow>(
    `SELECT j.id, j.name, json_agg(json_build_object('taskId', t.task_id, 'durationMin', t.duration_min) ORDER BY t.position) AS tasks
     FROM jobs j JOIN job_tasks t ON t.job_id = j.id
     WHERE j.site_id = :siteId AND CASE WHEN :isForWorker THEN j.id = CAST(:jobId AS uuid)
       ELSE NOT j.is_archived AND EXISTS (SELECT 1 FROM job_tasks x WHERE x.job_id = j.id AND x.task_id = :taskId) END
     GROUP BY j.id ORDER BY j.name, j.id LIMIT ${MOST_JOBS}`,
    {
      siteId: task.siteId,
      taskId: task.id,
      isForWorker: worker !== null,
      jobId: worker?.jobId ?? null,
    },
  );
}

interface NoiseRow {
  id: string;
  name: string;
  zone: Zone;
  level: Parameters<typeof toTaskLevel>[0] | null;
}

async function tasksOf(
  ids: readonly string[],
  date: string,
): Promise<Map<string, Omit<NoiseRow, "level"> & { level: TaskLevel | null }>> {
  const found = await rows<NoiseRow>(
    `SELECT k.id, k.name, coalesce(a.zone, 'none') AS zone, (SELECT to_jsonb(x) FROM (
        SELECT ${LEVEL_COLUMNS("l")} FROM task_levels l WHERE l.task_id = k.id AND l.effective_from <= :date
        ORDER BY l.effective_from DESC, l.number DESC LIMIT 1) x) AS level
     FROM tasks k LEFT JOIN areas a ON a.id = k.area_id WHERE k.id IN (:ids)`,
    { ids: [...new Set(ids)], date },
  );
  return new Map(
    found.map(({ level, ...task }) => [task.id, { ...task, level: level && toTaskLevel(level) }]),
  );
}
