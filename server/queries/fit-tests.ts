import type { z } from "zod";
import { labelLess7Db } from "../../shared/acoustics/protection/attenuation";
import type { ProtectorData } from "../../shared/acoustics/types";
import { ruleSetInForce } from "../../shared/rule-sets";
import type { FitTestFilter, FitTestView } from "../../shared/schemas/fit";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { type Actor, abilities, visible } from "../lib/policy";
import { fitTestPolicy } from "../policies";
import { dueAfterTest } from "./fit-dues";
import { pairPassed, ratesPair } from "./own-attenuation";

type Found = Omit<FitTestView, "can" | "labelLess7Db"> & {
  createdAt: string;
  /** The site's rules of today, and the label in force. */
  today: string;
  governingRuleSet: string | null;
  kind: ProtectorData["kind"];
  usRatingDb: number | null;
};

/** The test that counts of a worker and a model: the latest that stands. */
const isLatest = `NOT f.is_void AND ${ratesPair("v")} AND NOT EXISTS (
  SELECT 1 FROM fit_tests x JOIN fit_test_revisions y ON y.id = x.current_revision_id AND ${ratesPair("y")}
  WHERE x.worker_id = f.worker_id AND x.model_id = f.model_id AND NOT x.is_void AND (x.tested_on, x.created_at) > (f.tested_on, f.created_at))`;

const passedBefore = `(SELECT y.has_passed FROM fit_tests x JOIN fit_test_revisions y ON y.id = x.current_revision_id AND ${ratesPair("y")}
  WHERE x.worker_id = f.worker_id AND x.model_id = f.model_id AND NOT x.is_void AND (x.tested_on, x.created_at) < (f.tested_on, f.created_at)
  ORDER BY x.tested_on DESC, x.created_at DESC LIMIT 1)`;

/** What was tested is with the worker, in that size as far as one is stated: handed out before the test, or after the latest. */
const isOut = `EXISTS (SELECT 1 FROM protector_issues i WHERE i.worker_id = f.worker_id AND i.model_id = f.model_id AND i.ended_on IS NULL
  AND (i.size IS NULL OR v.size IS NULL OR i.size = v.size) AND (i.issued_on <= f.tested_on OR (${isLatest})))`;

const TODAY = "(now() AT TIME ZONE s.time_zone)::date";

const SELECT_FIT_TESTS = `SELECT f.id, f.revision, f.site_id AS "siteId", f.worker_id AS "workerId", w.name AS "workerName", w.employee_number AS "employeeNumber",
    f.model_id AS "modelId", m.name AS "modelName", f.tested_on::text AS "testedOn", f.created_at::text AS "createdAt", v.method, v.size, v.facts, v.confidence_pct AS "confidencePct",
    v.need_db AS "needDb", v.note, v.left_db AS "leftDb", v.right_db AS "rightDb", v.par_db AS "parDb", ${pairPassed("v")} AS "hasPassed",
    v.active_passed AS "activePassed", f.is_void AS "isVoid",
    CASE WHEN f.is_void THEN v.reason END AS "struckReason", u.name AS "authorName",
    CASE WHEN EXISTS (SELECT 1 FROM protector_issues i WHERE i.fit_test_id = f.id) OR ${isOut} THEN 'issued' ELSE 'tried' END AS outcome,
    ${TODAY}::text AS today, m.kind, (SELECT (r.data->>'usRatingDb')::float FROM protector_model_revisions r
      WHERE r.model_id = f.model_id AND r.effective_from <= ${TODAY} ORDER BY r.effective_from DESC, r.number DESC LIMIT 1) AS "usRatingDb",
    (SELECT t.governing_rule_set FROM site_settings t WHERE t.site_id = f.site_id AND t.effective_from <= ${TODAY}
      ORDER BY t.effective_from DESC, t.number DESC LIMIT 1) AS "governingRuleSet",
    CASE WHEN ${isLatest} THEN (${dueAfterTest("f.tested_on", "v.has_passed", passedBefore, "NULL::date")})::text END AS "dueOn"
  FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id JOIN workers w ON w.id = f.worker_id
  JOIN sites s ON s.id = f.site_id JOIN protector_models m ON m.id = f.model_id LEFT JOIN users u ON u.id = v.author_id`;

function present(
  actor: Actor,
  { createdAt: _, today, governingRuleSet, kind, usRatingDb, ...test }: Found,
): FitTestView {
  const governing = governingRuleSet === null ? undefined : ruleSetInForce(governingRuleSet, today);
  return {
    ...test,
    labelLess7Db: governing ? labelLess7Db({ kind, usRatingDb }, governing.protection) : null,
    can: { change: abilities(fitTestPolicy, actor, test).change && !test.isVoid },
  };
}

/** Fit tests, the latest first; struck ones stand among them. */
export async function listFitTests(
  actor: Actor,
  filter: z.output<typeof FitTestFilter>,
): Promise<{ rows: FitTestView[]; next: string | null }> {
  const before = decodeCursor(filter.cursor, 3);
  const conditions = [
    visible(fitTestPolicy, actor, "f"),
    filter.siteId && "f.site_id = :siteId",
    filter.workerId && "f.worker_id = :workerId",
    filter.modelId && "f.model_id = :modelId",
    before &&
      "(f.tested_on, f.created_at, f.id) < (CAST(:beforeDate AS date), CAST(:beforeAt AS timestamptz), CAST(:beforeId AS uuid))",
  ].filter(Boolean);
  const found = await rows<Found>(
    `${SELECT_FIT_TESTS} WHERE ${conditions.join(" AND ")} ORDER BY f.tested_on DESC, f.created_at DESC, f.id DESC LIMIT :limit`,
    {
      siteId: filter.siteId,
      workerId: filter.workerId,
      modelId: filter.modelId,
      beforeDate: before?.[0] ?? null,
      beforeAt: before?.[1] ?? null,
      beforeId: before?.[2] ?? null,
      limit: filter.limit + 1,
    },
  );
  const page = pageFrom(found, filter.limit, ({ testedOn, createdAt, id }) => [
    testedOn,
    createdAt,
    id,
  ]);
  return { ...page, rows: page.rows.map((test) => present(actor, test)) };
}

export async function fitTestsById(actor: Actor, id: string): Promise<FitTestView[]> {
  const found = await rows<Found>(
    `${SELECT_FIT_TESTS} WHERE f.id = :id AND ${visible(fitTestPolicy, actor, "f")}`,
    { id },
  );
  return found.map((test) => present(actor, test));
}
