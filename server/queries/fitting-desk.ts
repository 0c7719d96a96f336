import { lawOf } from "../../shared/acoustics/exchange-law";
import { outsideCriterion } from "../../shared/acoustics/outside-criterion";
import { isInNoise } from "../../shared/acoustics/protection/at-ear";
import {
  type Offer,
  type OwnFit,
  ProtectorChoice,
  type WornGear,
} from "../../shared/acoustics/protection/choose-protector";
import type { DayInput, TimedTask } from "../../shared/acoustics/types";
import type { Candidate, FitPolicyInput, FittingDesk } from "../../shared/schemas/fit";
import type { ProtectorUse } from "../../shared/schemas/protector";
import { todayAt } from "../lib/calendar";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import type { Worker } from "../models/worker";
import { fitPolicy, issuePolicy, protectorPolicy } from "../policies";
import { PROTECTOR_COLUMNS, toProtector } from "./day-inputs";
import { listFitTests } from "./fit-tests";
import { FIT_POLICY } from "./sites";
import { type WorkerNoise, workerNoise } from "./worker-noise";

/** Tests that the desk shows; the worker's page has all of them. */
const LATEST_TESTS = 50;

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
  const tests = await listFitTests(actor, { workerId: worker.id, limit: LATEST_TESTS });
  const can = abilities(fitPolicy, actor, worker);
  return {
    worker: { ...facts, personalTargetDb: worker.personalTargetDb },
    ruleSetKey: noise.governing.key,
    ruleSetVersion: noise.governing.version,
    need: noise.need,
    policy,
    candidates: await candidates(actor, worker, noise, today, [
      ...new Set([...facts.wornGear, ...(await gearOf(noise.day))]),
    ]),
    tests: tests.rows,
    issued: await issuedTo(actor, worker.id),
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
async function gearOf(day: DayInput | null): Promise<WornGear[]> {
  const ids = day?.shifts.flatMap(({ tasks }) => tasks.map(({ taskId }) => taskId)) ?? [];
  if (ids.length === 0) return [];
  const found = await rows<{ gear: WornGear }>(
    "SELECT DISTINCT unnest(required_gear) AS gear FROM tasks WHERE id IN (:ids)",
    { ids },
  );
  return found.map(({ gear }) => gear);
}

/** The register's single devices in the order of suitability for this worker's noise. */
async function candidates(
  actor: Actor,
  worker: Worker,
  { governing, day, need }: WorkerNoise,
  date: string,
  wornGear: readonly WornGear[],
): Promise<Candidate[]> {
  const offers = await offersAt(actor, worker.siteId, date);
  const noises = day && need.outsideDb !== null ? noisesOf(day, governing.protection.adequacy) : [];
  const law = { ...lawOf(outsideCriterion(governing)), table: null, thresholdDb: null };
  const choice = new ProtectorChoice(offers, governing.protection, law);
  return choice.for({
    noises,
    personalTargetDb: worker.personalTargetDb,
    wornGear,
    wornMin: noises.reduce((sum, { durationMin }) => sum + durationMin, 0),
    fits: await fitsOf(worker.id, date),
  });
}

type Noise = TimedTask & { level: NonNullable<TimedTask["level"]> };

/** By EN 458 the tasks in noise; where the shift is judged, all of it. */
function noisesOf(day: DayInput, adequacy: string): Noise[] {
  return day.shifts
    .flatMap(({ tasks }) => tasks)
    .filter((task): task is Noise => task.level !== null && task.durationMin > 0)
    .filter(
      (task) => adequacy === "appendix-b" || day.mustWear || isInNoise(task, day.site.wearFromDb),
    );
}

type OfferRow = Parameters<typeof toProtector>[0] & { stock: number | null };

async function offersAt(actor: Actor, siteId: string, date: string): Promise<Offer[]> {
  const found = await rows<OfferRow>(
    `SELECT DISTINCT ON (m.id) ${PROTECTOR_COLUMNS},
       (SELECT sum(k.quantity)::int FROM stock_moves k WHERE k.site_id = :siteId AND k.model_id = m.id AND k.part = 'device') AS stock
     FROM protector_models m JOIN protector_model_revisions p ON p.model_id = m.id AND p.effective_from <= :date
     WHERE NOT m.is_archived AND ${visible(protectorPolicy, actor, "m")} ORDER BY m.id, p.effective_from DESC, p.number DESC`,
    { siteId, date },
  );
  return found.map(({ stock, ...model }) => ({
    inner: toProtector(model),
    outer: null,
    combinationBands: null,
    name: model.name,
    worksWith: { ...NOT_STATED, ...(model.data as Partial<ProtectorUse>).worksWith },
    isArchived: false,
    stock,
  }));
}

const NOT_STATED = { helmet: null, glasses: null, respirator: null };

/** The fit that counts, by model. */
async function fitsOf(workerId: string, date: string): Promise<Map<string, OwnFit>> {
  const found = await rows<OwnFit & { modelId: string }>(
    `SELECT DISTINCT ON (f.model_id) f.model_id AS "modelId", v.par_db AS "parDb", v.has_passed AS "hasPassed", f.tested_on::text AS "testedOn"
     FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id
     WHERE f.worker_id = :workerId AND NOT f.is_void AND v.par_db IS NOT NULL AND f.tested_on <= :date
     ORDER BY f.model_id, f.tested_on DESC, f.created_at DESC`,
    { workerId, date },
  );
  return new Map(found.map(({ modelId, ...fit }) => [modelId, fit]));
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
