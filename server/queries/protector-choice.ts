import { lawAtEar } from "../../shared/acoustics/outside-criterion";
import {
  ProtectorChoice,
  type RankedProtector,
  type Wearer as WearerOf,
  type WornGear,
} from "../../shared/acoustics/protection/choose-protector";
import { noisesOf, wornMinOf } from "../../shared/acoustics/protection/noises";
import type { RuleSetVersion, TimedTask } from "../../shared/acoustics/types";
import { besideScaleDb } from "../../shared/rule-sets";
import type { ProtectorChoiceView, Wearer } from "../../shared/schemas/choice";
import { todayAt } from "../lib/calendar";
import { row, rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, visible } from "../lib/policy";
import { workerPolicy } from "../policies";
import { gridTasks } from "./day-grid";
import {
  activeChecksOf,
  bareTask,
  fitsOf,
  offersAt,
  pairsOf,
  requiredGear,
} from "./register-offers";
import { type SettingsInForce, settingsInForce } from "./site-settings";

/** Whose noise protectors are compared for. */
export interface ChoiceSubject {
  readonly kind: "task" | "job";
  readonly id: string;
  readonly name: string;
  readonly siteId: string;
}

/** Of a task that is in no nominal day. */
const ASSUMED_MIN = 480;
/** Assigned in one go, as the route takes them. */
const MOST_WEARERS = 200;
const MOST_PAIRS = 30;

/**
 * The register in the order in which it suits a task or a job's nominal day, single and double, and who would wear it.
 *
 * @throws AppError not-computed, where the site has no rules today.
 */
export async function protectorChoice(
  actor: Actor,
  subject: ChoiceSubject,
): Promise<ProtectorChoiceView> {
  const { siteId } = subject;
  const site = only(
    await rows<{ name: string; timeZone: string }>(
      `SELECT name, time_zone AS "timeZone" FROM sites WHERE id = :siteId`,
      { siteId },
    ),
  );
  const date = todayAt(site.timeZone);
  const settings = await settingsInForce(siteId, date);
  const { governing } = settings;
  const { adequacy, targetDb } = governing.protection;
  const { noises, gear, longestMin, singles, rank } = await choiceFor(
    actor,
    subject,
    date,
    settings,
  );
  const pairs = await pairsOf(singles, date);
  const wearers = await wearersOf(actor, subject, date, governing.protection);
  const creditedModelIds = settings.creditsActivePart ? checkedOnAll(wearers) : undefined;
  const ofAll = { wornGear: gear, fits: new Map(), creditedModelIds };
  return {
    subject: {
      ...subject,
      siteName: site.name,
      area: subject.kind === "task" ? await areaOf(subject.id) : null,
    },
    date,
    ruleSetKey: governing.key,
    ruleSetVersion: governing.version,
    targetDb: adequacy === "not-stated" ? null : targetDb,
    noises: noises.map(({ taskId, name, level, durationMin }) => ({
      taskId,
      taskName: name,
      levelDb: level.levelDb,
      durationMin,
      hasSpectrum: level.octaveBandsDb !== null,
    })),
    isDurationAssumed: subject.kind === "task" && longestMin === null,
    requiredGear: gear,
    creditsActivePart: settings.creditsActivePart,
    singles: rank(singles, ofAll),
    pairs: rank(pairs, ofAll)
      .filter(({ wornDb }) => wornDb !== null)
      .slice(0, MOST_PAIRS),
    wearers: wearers.slice(0, MOST_WEARERS),
    hasMoreWearers: wearers.length > MOST_WEARERS,
  };
}

/** The register at a site, and how it is ranked for what one or all of those wear who do this work. */
export async function choiceFor(
  actor: Actor,
  subject: Pick<ChoiceSubject, "kind" | "id" | "siteId">,
  date: string,
  settings: SettingsInForce,
) {
  const { siteId } = subject;
  const { governing } = settings;
  const longestMin = subject.kind === "task" ? await longestNominalMin(subject.id) : null;
  const minutes =
    subject.kind === "task"
      ? new Map([[subject.id, longestMin ?? ASSUMED_MIN]])
      : await nominalMinutes(subject.id);
  const tasks = (await gridTasks(siteId, date)).flatMap((task): TimedTask[] => {
    const durationMin = minutes.get(task.id);
    return durationMin === undefined ? [] : [bareTask(task, durationMin)];
  });
  // A task by itself was chosen because of its noise, whatever its level.
  const noises = noisesOf(tasks, governing, { site: settings, mustWear: subject.kind === "task" });
  const gear = await requiredGear(noises.map(({ taskId }) => taskId));
  const singles = await offersAt(actor, siteId, date);
  const rank = (
    offers: typeof singles,
    wearer: Pick<WearerOf, "wornGear" | "fits" | "creditedModelIds" | "barredModelIds">,
  ): RankedProtector[] =>
    new ProtectorChoice(
      offers,
      governing.protection,
      lawAtEar(governing),
      besideScaleDb(governing),
    ).for({ noises, personalTargetDb: null, wornMin: wornMinOf(noises), ...wearer });
  return { noises, gear, longestMin, singles, rank };
}

/** What is credited for a group is what the verdict of each of them would rest on; more than are known prove nothing. */
function checkedOnAll(wearers: readonly Wearer[]): Set<string> {
  const [first, ...others] = wearers.length > MOST_WEARERS ? [] : wearers;
  return new Set(
    first?.checkedModelIds.filter((modelId) =>
      others.every(({ checkedModelIds }) => checkedModelIds.includes(modelId)),
    ),
  );
}

/** How long each task of a job's nominal day lasts, in minutes by task. */
async function nominalMinutes(id: string): Promise<Map<string, number>> {
  const found = await rows<{ taskId: string; durationMin: number }>(
    `SELECT task_id AS "taskId", duration_min AS "durationMin" FROM job_tasks WHERE job_id = :id`,
    { id },
  );
  return new Map(found.map(({ taskId, durationMin }) => [taskId, durationMin]));
}

const areaOf = (taskId: string) =>
  row<{ id: string; name: string }>(
    "SELECT a.id, a.name FROM tasks t JOIN areas a ON a.id = t.area_id WHERE t.id = :taskId",
    { taskId },
  );

async function longestNominalMin(taskId: string): Promise<number | null> {
  const found = await row<{ longest: number | null }>(
    `SELECT max(j.duration_min) AS longest FROM job_tasks j JOIN jobs b ON b.id = j.job_id AND NOT b.is_archived WHERE j.task_id = :taskId`,
    { taskId },
  );
  return found?.longest ?? null;
}

type WearerRow = Omit<Wearer, "fits" | "checkedModelIds"> & { wornGear: WornGear[] };

/** Workers of the job, or of the jobs that have the task, with what is assigned to them for this use. */
async function wearersOf(
  actor: Actor,
  { kind, id, siteId }: ChoiceSubject,
  date: string,
  rule: RuleSetVersion["protection"],
): Promise<Wearer[]> {
  const ofSubject =
    kind === "job"
      ? "w.job_id = :id"
      : "EXISTS (SELECT 1 FROM job_tasks j WHERE j.job_id = w.job_id AND j.task_id = :id)";
  const ofUse =
    kind === "job"
      ? "a.task_id IS NULL AND a.area_id IS NULL"
      : "(a.task_id = :id OR (a.task_id IS NULL AND (a.area_id IS NULL OR a.area_id = (SELECT area_id FROM tasks WHERE id = :id))))";
  const found = await rows<WearerRow>(
    `SELECT w.id, w.name, w.employee_number AS "employeeNumber", w.worn_gear AS "wornGear", w.hired_on::text AS "hiredOn",
       (SELECT c.name FROM crew_memberships m JOIN crews c ON c.id = m.crew_id WHERE m.worker_id = w.id AND m.valid @> CAST(:date AS date)
        ORDER BY lower(m.valid) DESC LIMIT 1) AS "crewName",
       (SELECT i.name || coalesce(' + ' || o.name, '') FROM assignments a JOIN protector_models i ON i.id = a.inner_model_id
          LEFT JOIN protector_models o ON o.id = a.outer_model_id
        WHERE a.worker_id = w.id AND a.valid @> CAST(:date AS date) AND ${ofUse} ORDER BY a.task_id NULLS LAST, a.area_id NULLS LAST LIMIT 1) AS "currentName",
       coalesce((SELECT json_agg(json_build_object('use', CASE WHEN a.task_id IS NOT NULL THEN 'subject' WHEN a.area_id IS NOT NULL THEN 'area' ELSE 'everywhere' END,
          'modelId', a.inner_model_id, 'outerModelId', a.outer_model_id, 'fromDate', lower(a.valid)::text))
        FROM assignments a WHERE a.worker_id = w.id AND upper_inf(a.valid) AND (a.task_id = :id OR a.task_id IS NULL)
          AND (a.area_id IS NULL OR a.area_id = (SELECT area_id FROM tasks WHERE id = :id))), '[]') AS holds
     FROM workers w WHERE w.site_id = :siteId AND ${ofSubject} AND w.hired_on <= CAST(:date AS date) + 31
       AND (w.left_on IS NULL OR w.left_on >= CAST(:date AS date)) AND ${visible(workerPolicy, actor, "w")}
     ORDER BY w.name, w.id LIMIT ${MOST_WEARERS + 1}`,
    { id, siteId, date },
  );
  const ids = found.map(({ id: workerId }) => workerId);
  const fits = await fitsOf(ids, date, rule);
  const checks = await activeChecksOf(ids, date);
  return found.map((worker) => ({
    ...worker,
    checkedModelIds: [...(checks.get(worker.id) ?? [])],
    fits: [...(fits.get(worker.id) ?? [])].map(([modelId, { parDb, hasPassed, needDb }]) => ({
      modelId,
      parDb,
      hasPassed,
      needDb,
    })),
  }));
}
