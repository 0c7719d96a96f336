import type { TriedWorker, TryContext } from "../../shared/planning/try-changes";
import type { PlanScope, TrySubject } from "../../shared/schemas/plan";
import { todayAt } from "../lib/calendar";
import { row, rows } from "../lib/db";
import { type Actor, findVisible, visible } from "../lib/policy";
import { Area } from "../models/site";
import { Job } from "../models/task";
import { Crew, Worker } from "../models/worker";
import { crewPolicy, programmePolicy, workerPolicy } from "../policies";
import { assignmentsOn, gridTasks, lastWearing } from "./day-grid";
import { fitsOf, offersAt, pairsOf } from "./register-offers";
import { settingsInForce } from "./site-settings";

/** Tried on at once. */
const MOST_WORKERS = 200;

/** What changes are tried for, as far as this actor may see it. @throws AppError not-found */
export async function scopeOf(
  actor: Actor,
  { scopeKind, scopeId }: PlanScope,
): Promise<{ id: string; name: string; siteId: string }> {
  switch (scopeKind) {
    case "worker":
      return findVisible(Worker, workerPolicy, scopeId, actor);
    case "job":
      return findVisible(Job, programmePolicy, scopeId, actor);
    case "area":
      return findVisible(Area, programmePolicy, scopeId, actor);
    case "crew":
      return findVisible(Crew, crewPolicy, scopeId, actor);
  }
}

const OF_SCOPE: Record<PlanScope["scopeKind"], string> = {
  worker: "w.id = :scopeId",
  job: "w.job_id = :scopeId",
  area: `EXISTS (SELECT 1 FROM job_tasks j JOIN tasks k ON k.id = j.task_id WHERE j.job_id = w.job_id AND k.area_id = :scopeId)`,
  crew: "EXISTS (SELECT 1 FROM crew_memberships m WHERE m.worker_id = w.id AND m.crew_id = :scopeId AND m.valid @> CAST(:date AS date))",
};

interface WorkerRow extends Omit<TriedWorker, "tasks" | "assignments" | "fits" | "lengthMin"> {
  nominal: { taskId: string; durationMin: number }[];
  usualLengthMin: number | null;
}

/**
 * The nominal days of a worker, a group, a crew or of all who work in an area, with what they wear and how long: what the Crew
 * sheet expects of today, or of the date `on`. A fixed number of statements.
 *
 * @throws AppError not-found; not-computed, where the site has no rules today
 */
export async function trySubject(
  actor: Actor,
  scope: PlanScope,
  on: string | null = null,
): Promise<TrySubject> {
  const subject = await scopeOf(actor, scope);
  const { siteId } = subject;
  const site = await row<{ name: string; timeZone: string }>(
    `SELECT name, time_zone AS "timeZone" FROM sites WHERE id = :siteId`,
    { siteId },
  );
  const date = on ?? todayAt(site?.timeZone ?? "UTC");
  const settings = await settingsInForce(siteId, date);
  const { governing } = settings;
  const found = await rows<WorkerRow>(
    `SELECT w.id, w.name, w.employee_number AS "employeeNumber", w.must_wear AS "mustWear", w.personal_target_db AS "personalTargetDb",
       coalesce((SELECT json_agg(json_build_object('taskId', j.task_id, 'durationMin', j.duration_min) ORDER BY j.position)
                 FROM job_tasks j WHERE j.job_id = w.job_id), '[]') AS nominal,
       (SELECT c.usual_length_min FROM crew_memberships m JOIN crews c ON c.id = m.crew_id WHERE m.worker_id = w.id AND m.valid @> CAST(:date AS date)
        ORDER BY m.is_loan, lower(m.valid) DESC LIMIT 1) AS "usualLengthMin"
     FROM workers w WHERE w.site_id = :siteId AND ${OF_SCOPE[scope.scopeKind]} AND w.hired_on <= CAST(:date AS date)
       AND (w.left_on IS NULL OR w.left_on >= CAST(:date AS date)) AND ${visible(workerPolicy, actor, "w")}
     ORDER BY w.name, w.id LIMIT ${MOST_WORKERS + 1}`,
    { siteId, scopeId: scope.scopeId, date },
  );
  const taken = found.slice(0, MOST_WORKERS);
  const withDay = taken.filter(({ nominal }) => nominal.length > 0);
  const ids = `{${withDay.map(({ id }) => id).join(",")}}`;
  const worn = await lastWearing(ids, date);
  const assignments = await assignmentsOn(ids, date);
  const fits = await fitsOf(
    withDay.map(({ id }) => id),
    date,
    governing.protection,
  );
  const singles = await offersAt(actor, siteId, date);
  const pairs = await pairsOf(singles, date);
  return {
    scope: { ...scope, name: subject.name, siteId, siteName: site?.name ?? "" },
    date,
    ruleSetKey: settings.governingRuleSet,
    ruleSetVersion: settings.ruleSetVersion,
    site: {
      wearFromDb: settings.wearFromDb,
      creditsActivePart: settings.creditsActivePart,
      usesUncertainty: settings.usesUncertainty,
    },
    tasks: await gridTasks(siteId, date),
    models: singles.map(({ inner }) => inner),
    pairs: pairs.flatMap(({ inner, outer, combinationBands }) =>
      outer && combinationBands
        ? [{ innerModelId: inner.modelId, outerModelId: outer.modelId, bands: combinationBands }]
        : [],
    ),
    workers: withDay.map(({ nominal, usualLengthMin, ...worker }) => ({
      ...worker,
      // As the Crew sheet expects it: a nominal day that is longer than the shift is the shift.
      lengthMin: Math.max(
        usualLengthMin ?? 0,
        nominal.reduce((sum, { durationMin }) => sum + durationMin, 0),
      ),
      tasks: nominal.map((task) => ({
        ...task,
        wornPct: worn.get(worker.id)?.[task.taskId] ?? null,
      })),
      assignments: assignments
        .filter(({ workerId }) => workerId === worker.id)
        .map(({ workerId: _, ...assignment }) => assignment),
      fits: [...(fits.get(worker.id) ?? [])].map(([modelId, { parDb }]) => ({ modelId, parDb })),
    })),
    withoutDay: taken
      .filter(({ nominal }) => nominal.length === 0)
      .map(({ id, name }) => ({ id, name })),
    hasMore: found.length > MOST_WORKERS,
  };
}

export const contextOf = ({ date, site, tasks, models, pairs }: TrySubject): TryContext => ({
  date,
  site,
  tasks,
  models,
  pairs,
});
