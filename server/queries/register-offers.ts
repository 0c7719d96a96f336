import { normalShare } from "../../shared/acoustics/distributions";
import {
  isWornInside,
  isWornOver,
  LOWER_CONFIDENCE_PCT,
  type Offer,
  type OwnFit,
  type WornGear,
} from "../../shared/acoustics/protection/choose-protector";
import { fitRating } from "../../shared/acoustics/protection/fit-rating";
import type { BandAttenuation, RuleSetVersion, TimedTask } from "../../shared/acoustics/types";
import type { KnownTask } from "../../shared/day/build-day-input";
import type { FitFacts } from "../../shared/schemas/fit";
import type { ProtectorUse } from "../../shared/schemas/protector";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { protectorPolicy } from "../policies";
import { PROTECTOR_COLUMNS, toProtector } from "./day-inputs";
import { activeCheckInForce, combinationInForce, ratesPair } from "./own-attenuation";

type OfferRow = Parameters<typeof toProtector>[0] & { stock: number | null };

const NOT_STATED: ProtectorUse["worksWith"] = { helmet: null, glasses: null, respirator: null };

/** The single devices that a site can give out on a date. */
export async function offersAt(actor: Actor, siteId: string, date: string): Promise<Offer[]> {
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

/** Every plug under every muff, with the test data of the two together where there are any. */
export async function pairsOf(singles: readonly Offer[], date: string): Promise<Offer[]> {
  const inside = singles.filter(({ inner }) => isWornInside(inner.kind));
  const over = singles.filter(({ inner }) => isWornOver(inner.kind));
  if (inside.length === 0 || over.length === 0) return [];
  const tested = await rows<{ innerId: string; outerId: string; bands: BandAttenuation }>(
    `SELECT i.id AS "innerId", o.id AS "outerId", c.bands FROM unnest(CAST(:inside AS uuid[])) i(id) CROSS JOIN unnest(CAST(:over AS uuid[])) o(id)
     JOIN protector_combinations c ON c.id = ${combinationInForce("i.id", "o.id", "CAST(:date AS date)")}`,
    { inside: idsOf(inside), over: idsOf(over), date },
  );
  const bandsOf = new Map(
    tested.map(({ innerId, outerId, bands }) => [`${innerId} ${outerId}`, bands]),
  );
  return inside.flatMap((plug) =>
    over.map((muff) => ({
      inner: plug.inner,
      outer: muff.inner,
      combinationBands: bandsOf.get(`${plug.inner.modelId} ${muff.inner.modelId}`) ?? null,
      name: `${plug.name} + ${muff.name}`,
      worksWith: {
        helmet: both(plug.worksWith.helmet, muff.worksWith.helmet),
        glasses: both(plug.worksWith.glasses, muff.worksWith.glasses),
        respirator: both(plug.worksWith.respirator, muff.worksWith.respirator),
      },
      isArchived: false,
      stock: plug.stock === null || muff.stock === null ? null : Math.min(plug.stock, muff.stock),
    })),
  );
}

const idsOf = (offers: readonly Offer[]) =>
  `{${offers.map(({ inner }) => inner.modelId).join(",")}}`;

const both = (one: boolean | null, other: boolean | null): boolean | null =>
  one === false || other === false ? false : one === null || other === null ? null : true;

/** The fit that counts, by worker and model, and what it comes to for the shares at which labels are compared. */
export async function fitsOf(
  workerIds: readonly string[],
  date: string,
  { alpha }: Pick<RuleSetVersion["protection"], "alpha">,
): Promise<Map<string, Map<string, OwnFit>>> {
  const found = await rows<FitRow>(
    `SELECT DISTINCT ON (f.worker_id, f.model_id) f.worker_id AS "workerId", f.model_id AS "modelId", v.par_db AS "parDb",
       CASE WHEN v.need_db <= 0 THEN NULL ELSE v.has_passed END AS "hasPassed", v.need_db AS "needDb", f.tested_on::text AS "testedOn", v.facts
     FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id
     WHERE f.worker_id = ANY (CAST(:ids AS uuid[])) AND NOT f.is_void AND ${ratesPair("v")} AND f.tested_on <= :date
     ORDER BY f.worker_id, f.model_id, f.tested_on DESC, f.created_at DESC`,
    { ids: `{${workerIds.join(",")}}`, date },
  );
  const fits = new Map<string, Map<string, OwnFit>>();
  for (const { workerId, modelId, facts, ...fit } of found) {
    const parAt = (confidencePct: number) =>
      fitRating({ ...facts, confidencePct, needDb: null }).rating?.parDb ?? fit.parDb;
    const ofModel = {
      ...fit,
      atRuleShareDb: parAt(100 * normalShare(alpha)),
      atLowerShareDb: parAt(LOWER_CONFIDENCE_PCT),
    };
    fits.set(workerId, (fits.get(workerId) ?? new Map()).set(modelId, ofModel));
  }
  return fits;
}

type FitRow = OwnFit & { workerId: string; modelId: string; facts: FitFacts };

/**
 * By worker the models whose active part has passed its check on them, which is what a day's verdict would rest on: of
 * the size that is assigned, where one is.
 */
export async function activeChecksOf(
  workerIds: readonly string[],
  date: string,
): Promise<Map<string, Set<string>>> {
  const found = await rows<{ workerId: string; modelId: string }>(
    `SELECT x.worker_id AS "workerId", x.model_id AS "modelId"
     FROM (SELECT DISTINCT f.worker_id, f.model_id, CAST(:date AS date) AS date FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id
       WHERE f.worker_id = ANY (CAST(:ids AS uuid[])) AND NOT f.is_void AND v.active_passed) x
     LEFT JOIN LATERAL (SELECT s.size FROM assignments s
       WHERE s.worker_id = x.worker_id AND s.inner_model_id = x.model_id AND s.outer_model_id IS NULL AND s.valid @> x.date
       ORDER BY (s.task_id IS NULL AND s.area_id IS NULL) DESC, s.id LIMIT 1) a ON TRUE
     JOIN fit_test_revisions c ON c.id = ${activeCheckInForce("x.worker_id", "x.model_id", "a.size", "x.date")} AND c.active_passed`,
    { ids: `{${workerIds.join(",")}}`, date },
  );
  const checks = new Map<string, Set<string>>();
  for (const { workerId, modelId } of found)
    checks.set(workerId, (checks.get(workerId) ?? new Set()).add(modelId));
  return checks;
}

/** What these tasks ask to be worn beside a protector. */
export async function requiredGear(taskIds: readonly string[]): Promise<WornGear[]> {
  const found = await rows<{ gear: WornGear }>(
    "SELECT DISTINCT unnest(required_gear) AS gear FROM tasks WHERE id = ANY (CAST(:ids AS uuid[])) ORDER BY 1",
    { ids: `{${taskIds.join(",")}}` },
  );
  return found.map(({ gear }) => gear);
}

/** A task of a nominal day as it is before anybody wears anything. */
export const bareTask = (
  { id, name, level, zone }: Pick<KnownTask, "id" | "name" | "level" | "zone">,
  durationMin: number,
): TimedTask => ({
  id,
  taskId: id,
  name,
  durationMin,
  level,
  zone,
  protection: null,
  wornPct: 100,
  wornIsShiftWide: false,
});
