import type { z } from "zod";
import { countVerdicts } from "../../shared/planning/try-changes";
import type {
  PlanChange,
  PlanFilter,
  PlanPage,
  PlanRow,
  PlanView,
} from "../../shared/schemas/plan";
import type { KeptTimetable } from "../../shared/schemas/timetable";
import type { PlanOutcome } from "../../shared/schemas/tried";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import { dayPolicy, planPolicy } from "../policies";
import { findingsToMend, stepOwners, stepsOf } from "./plan-steps";

interface Found extends Omit<PlanRow, "scope" | "before" | "after" | "can" | "keptAt"> {
  keptAt: Date;
  siteId: string;
  siteName: string;
  scopeKind: PlanRow["scope"]["scopeKind"];
  scopeId: string;
  scopeName: string | null;
  baseDate: string;
  methodVersion: number;
  changes: PlanChange[];
  timetable: KeptTimetable | null;
  outcome: PlanOutcome;
  sortedAt: string;
}

const SELECT = `SELECT p.id, p.name, p.kind, p.site_id AS "siteId", s.name AS "siteName", p.scope_kind AS "scopeKind", p.scope_id AS "scopeId",
    CASE p.scope_kind WHEN 'worker' THEN (SELECT name FROM workers WHERE id = p.scope_id) WHEN 'job' THEN (SELECT name FROM jobs WHERE id = p.scope_id)
      WHEN 'crew' THEN (SELECT name FROM crews WHERE id = p.scope_id) ELSE (SELECT name FROM areas WHERE id = p.scope_id) END AS "scopeName",
    p.goal, p.governing_rule_set AS "ruleSetKey", p.governing_version AS "ruleSetVersion", p.method_version AS "methodVersion",
    p.kept_at AS "keptAt", p.kept_at::text AS "sortedAt", u.name AS "authorName", p.put_aside_reason AS "putAsideReason",
    jsonb_array_length(p.changes) AS "changesCount", p.base_date::text AS "baseDate", p.changes, p.timetable, p.outcome, p.revision,
    k.open AS "stepsOpen", k.count AS "stepsCount"
  FROM plans p JOIN sites s ON s.id = p.site_id LEFT JOIN users u ON u.id = p.author_id
    CROSS JOIN LATERAL (SELECT count(*)::int AS count, count(*) FILTER (WHERE x.state = 'open')::int AS open FROM plan_steps x WHERE x.plan_id = p.id) k`;

/** Kept plans, the latest first. */
export async function listPlans(
  actor: Actor,
  { siteId, state, cursor, limit }: z.output<typeof PlanFilter>,
): Promise<z.input<typeof PlanPage>> {
  const after = decodeCursor(cursor, 2);
  const found = await rows<Found>(
    `${SELECT} WHERE ${visible(planPolicy, actor, "p")} AND (CAST(:siteId AS uuid) IS NULL OR p.site_id = :siteId)
       AND (:state = 'all' OR p.put_aside_reason IS NULL)
       AND (CAST(:at AS timestamptz) IS NULL OR (p.kept_at, p.id) < (CAST(:at AS timestamptz), CAST(:id AS uuid)))
     ORDER BY p.kept_at DESC, p.id DESC LIMIT :limit`,
    {
      siteId: siteId ?? null,
      state,
      at: after?.[0] ?? null,
      id: after?.[1] ?? null,
      limit: limit + 1,
    },
  );
  const page = pageFrom(found, limit, ({ sortedAt, id }) => [sortedAt, id]);
  return { rows: page.rows.map((one) => toRow(actor, one)), next: page.next };
}

function toRow(actor: Actor, one: Found): z.input<typeof PlanRow> {
  const { scopeKind, scopeId, scopeName, siteId, siteName, outcome, ...facts } = one;
  const count = (when: "before" | "after") =>
    countVerdicts(outcome.workers.map((worker) => worker[when]));
  const worst = (levels: (number | null)[]) =>
    levels.reduce<number | null>(
      (high, level) => (level === null ? high : Math.max(high ?? level, level)),
      null,
    );
  return {
    id: facts.id,
    name: facts.name,
    kind: facts.kind,
    scope: { scopeKind, scopeId, name: scopeName ?? "", siteId, siteName },
    goal: facts.goal,
    ruleSetKey: facts.ruleSetKey,
    ruleSetVersion: facts.ruleSetVersion,
    keptAt: facts.keptAt.toISOString(),
    authorName: facts.authorName,
    putAsideReason: facts.putAsideReason,
    changesCount: facts.changesCount,
    stepsOpen: facts.stepsOpen,
    stepsCount: facts.stepsCount,
    before: count("before"),
    after: count("after"),
    worstOutsideDb: worst(outcome.workers.map(({ after }) => after.outsideDb)),
    worstAtEarDb: worst(outcome.workers.map(({ after }) => after.atEarDb)),
    revision: facts.revision,
    can: abilities(planPolicy, actor, { siteId }),
  };
}

/** A plan with its changes, what they were expected to do, and what has been found since. */
export async function planView(actor: Actor, id: string): Promise<z.input<typeof PlanView>> {
  const one = only(
    await rows<Found>(`${SELECT} WHERE p.id = :id AND ${visible(planPolicy, actor, "p")}`, { id }),
  );
  const row = toRow(actor, one);
  return {
    ...row,
    baseDate: one.baseDate,
    methodVersion: one.methodVersion,
    changes: one.changes,
    timetable: one.timetable,
    outcome: one.outcome,
    steps: await stepsOf(one.id),
    owners: row.can.step ? await stepOwners(one.siteId) : [],
    findings: row.can.step
      ? await findingsToMend(
          actor,
          one.outcome.workers.map(({ workerId }) => workerId),
        )
      : [],
    names: await namesOf(one.changes),
    since: await since(actor, one),
  };
}

/** Names of the tasks, workers and protectors that changes speak of, by id. */
async function namesOf(changes: readonly PlanChange[]): Promise<Record<string, string>> {
  const ids = JSON.stringify(changes).match(/[0-9a-f]{8}(?:-[0-9a-f]{4}){3}-[0-9a-f]{12}/g) ?? [];
  const found = await rows<{ id: string; name: string }>(
    `SELECT id, name FROM tasks WHERE id = ANY (CAST(:ids AS uuid[])) UNION ALL SELECT id, name FROM workers WHERE id = ANY (CAST(:ids AS uuid[]))
     UNION ALL SELECT id, name FROM protector_models WHERE id = ANY (CAST(:ids AS uuid[]))`,
    { ids: `{${[...new Set(ids)].join(",")}}` },
  );
  return Object.fromEntries(found.map(({ id, name }) => [id, name]));
}

/**
 * Each worker's latest judged day after the one on which the plan was kept, with its verdict on the plan's goal. By the
 * same rules only: another rule set has another goal.
 */
async function since(actor: Actor, plan: Found): Promise<z.input<typeof PlanView>["since"]> {
  const found = await rows<{
    workerId: string;
    date: string;
    outsideDb: number | null;
    atEarDb: number | null;
    verdict: PlanOutcome["workers"][number]["after"]["verdict"] | null;
    grade: string;
  }>(
    `SELECT DISTINCT ON (d.worker_id) d.worker_id AS "workerId", d.date::text AS date, r.outside_db AS "outsideDb",
       coalesce(r.at_ear_counted_db, r.at_ear_db) AS "atEarDb", r.grade,
       (SELECT c->>'verdict' FROM jsonb_array_elements(r.criteria->'governing') c WHERE c->>'criterionId' = :goal LIMIT 1) AS verdict
     FROM days d JOIN day_results r ON r.id = d.current_result_id
     WHERE d.worker_id = ANY (CAST(:ids AS uuid[])) AND d.date > CAST(:date AS date) AND r.governing_rule_set = :ruleSet AND ${visible(dayPolicy, actor, "d")}
     ORDER BY d.worker_id, d.date DESC`,
    {
      ids: `{${plan.outcome.workers.map(({ workerId }) => workerId).join(",")}}`,
      date: plan.baseDate,
      goal: plan.goal,
      ruleSet: plan.ruleSetKey,
    },
  );
  return found.map((one) => ({ ...one, verdict: one.verdict ?? "not-assessed" }));
}
