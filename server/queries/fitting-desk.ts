import { lawAtEar } from "../../shared/acoustics/outside-criterion";
import {
  type OwnFit,
  ProtectorChoice,
  type WornGear,
} from "../../shared/acoustics/protection/choose-protector";
import { passesNeed } from "../../shared/acoustics/protection/fit-rating";
import { noisesOf, wornMinOf } from "../../shared/acoustics/protection/noises";
import type { DayInput } from "../../shared/acoustics/types";
import { besideScaleDb } from "../../shared/rule-sets";
import type { Candidate, FitPolicyInput, FittingDesk } from "../../shared/schemas/fit";
import { todayAt } from "../lib/calendar";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import type { Worker } from "../models/worker";
import { assignmentPolicy, fitPolicy, issuePolicy } from "../policies";
import { cannotWear } from "./cannot-wear";
import { listFitTests } from "./fit-tests";
import { activeChecksOf, fitsOf, offersAt, pairsOf, requiredGear } from "./register-offers";
import { FIT_POLICY } from "./sites";
import { type WorkerNoise, workerNoise } from "./worker-noise";

/** Tests that the desk shows; the worker's page has all of them. */
const LATEST_TESTS = 50;
const MOST_PAIRS = 10;

/**
 * A worker at the fitting desk: what the noise asks for, the register in the order in which it suits, what was tried and
 * what is out.
 *
 * @throws AppError not-computed, where the site has no rules today.
 */
export async function fittingDesk(actor: Actor, worker: Worker): Promise<FittingDesk> {
  const { policy, timeZone, ...facts } = only(await deskHead(worker.id));
  const today = todayAt(timeZone);
  const noise = await workerNoise(worker, today);
  const { singles, pairs } = await deskChoice(actor, worker, noise, today);
  const tests = await listFitTests(actor, { workerId: worker.id, limit: LATEST_TESTS });
  const can = abilities(fitPolicy, actor, worker);
  return {
    worker: { ...facts, personalTargetDb: worker.personalTargetDb },
    ruleSetKey: noise.governing.key,
    ruleSetVersion: noise.governing.version,
    need: noise.need,
    policy,
    creditsActivePart: noise.creditsActivePart,
    candidates: singles,
    pairs,
    tests: tests.rows,
    issued: await issuedTo(actor, worker.id),
    assigned: await assignedTo(actor, worker.id, today),
    can: { test: can.test, issue: can.issue },
  };
}

function deskHead(workerId: string) {
  return rows<
    Omit<FittingDesk["worker"], "personalTargetDb"> & {
      policy: FitPolicyInput;
      timeZone: string;
    }
  >(
    `SELECT w.id, w.site_id AS "siteId", s.name AS "siteName", w.name, w.employee_number AS "employeeNumber", j.name AS "jobName",
       w.worn_gear AS "wornGear", s.time_zone AS "timeZone", ${FIT_POLICY} AS policy
     FROM workers w JOIN sites s ON s.id = w.site_id LEFT JOIN jobs j ON j.id = w.job_id WHERE w.id = :workerId`,
    { workerId },
  );
}

/** What the tasks of a day ask to be worn beside a protector. */
const gearOf = (day: DayInput | null): Promise<WornGear[]> =>
  requiredGear(day?.shifts.flatMap(({ tasks }) => tasks.map(({ taskId }) => taskId)) ?? []);

/**
 * The register's single devices in the order of suitability for this worker's noise; and, where each of them leaves too
 * little, two together as far as the rule can say something of them.
 */
export async function deskChoice(
  actor: Actor,
  worker: Worker,
  { governing, creditsActivePart, day, need }: WorkerNoise,
  date: string,
): Promise<{ singles: Candidate[]; pairs: Candidate[] }> {
  const wornGear = [...new Set([...worker.wornGear, ...(await gearOf(day))])];
  const offers = await offersAt(actor, worker.siteId, date);
  const noises =
    day && need.outsideDb !== null
      ? noisesOf(
          day.shifts.flatMap(({ tasks }) => tasks),
          governing,
          day,
        )
      : [];
  const fits = await fitsOf([worker.id], date, governing.protection);
  const ofWorker = new Map(
    [...(fits.get(worker.id) ?? [])].map(
      ([modelId, fit]) => [modelId, judgedByNeed(fit, need.needDb)] as const,
    ),
  );
  const creditedModelIds = creditsActivePart
    ? (await activeChecksOf([worker.id], date)).get(worker.id)
    : undefined;
  const barredModelIds = (await cannotWear([worker.id], date)).get(worker.id);
  const rank = (ofThese: typeof offers): Candidate[] =>
    new ProtectorChoice(
      ofThese,
      governing.protection,
      lawAtEar(governing),
      besideScaleDb(governing),
    ).for({
      noises,
      personalTargetDb: worker.personalTargetDb,
      wornGear,
      wornMin: wornMinOf(noises),
      fits: ofWorker,
      creditedModelIds,
      barredModelIds,
    });
  const singles = rank(offers);
  const possible = singles.filter(({ excludedBy }) => excludedBy === null);
  const isTooLittle = possible.length > 0 && possible.every(({ word }) => word === "too-little");
  return {
    singles,
    pairs: isTooLittle
      ? rank(await pairsOf(offers, date))
          .filter(({ excludedBy }) => excludedBy === null)
          .slice(0, MOST_PAIRS)
      : [],
  };
}

/** A fit of which no need was known when it was tested is held against the one at the desk's head, dB. */
const judgedByNeed = (fit: OwnFit, needDb: number | null): OwnFit =>
  fit.needDb !== null ? fit : { ...fit, needDb, hasPassed: passesNeed(fit.parDb, needDb) };

function assignedTo(
  actor: Actor,
  workerId: string,
  today: string,
): Promise<FittingDesk["assigned"]> {
  return rows<FittingDesk["assigned"][number]>(
    `SELECT a.task_id AS "taskId", a.area_id AS "areaId", a.inner_model_id AS "innerModelId", a.outer_model_id AS "outerModelId", a.size,
       concat_ws(' + ', i.name, o.name) AS name, lower(a.valid)::text AS "fromDate", (upper(a.valid) - 1)::text AS "toDate"
     FROM assignments a JOIN protector_models i ON i.id = a.inner_model_id LEFT JOIN protector_models o ON o.id = a.outer_model_id
     WHERE a.worker_id = :workerId AND ${visible(assignmentPolicy, actor, "a")} AND a.valid && daterange(CAST(:today AS date), NULL)
     ORDER BY lower(a.valid), a.id`,
    { workerId, today },
  );
}

function issuedTo(actor: Actor, workerId: string): Promise<FittingDesk["issued"]> {
  return rows<FittingDesk["issued"][number]>(
    `SELECT i.id, i.revision, i.model_id AS "modelId", m.name AS "modelName", i.size, i.issued_on::text AS "issuedOn",
       i.acknowledged_at IS NOT NULL AS "isAcknowledged"
     FROM protector_issues i JOIN protector_models m ON m.id = i.model_id
     WHERE i.worker_id = :workerId AND i.ended_on IS NULL AND ${visible(issuePolicy, actor, "i")} ORDER BY i.issued_on DESC, i.created_at DESC`,
    { workerId },
  );
}
