import type { z } from "zod";
import type { DutyFilter, DutyItem, DutyKind, DutyPage } from "../../shared/schemas/duty";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { canBeLate } from "../lib/overdue";
import { type Actor, visible } from "../lib/policy";
import {
  findingPolicy,
  fitPolicy,
  letterPolicy,
  programmePolicy,
  surveyPolicy,
  workerPolicy,
} from "../policies";
import { fitDues } from "./fit-dues";
import { TRAINING_DUTIES, trainingDues } from "./training";

/**
 * What is due, kind by kind, each as a query of (id, site_id, due_on, worker_id, what, target_id, finding_kind,
 * criterion): what the actor may see of it, in one statement for all.
 *
 * - finding: open ones with a date.
 * - measure: planned and not done, of an open finding.
 * - notice: letters of results that have not reached their worker.
 * - monitoring: after a change, while a level from before it is in force; at once, for no text gives a term.
 * - calibration, fit-test, cushions: by the dates that the instruments, the site's policy and the models state.
 * - training: by the rule set in force (shared/rule-sets/duties.ts).
 */
const sources: Readonly<Record<DutyKind, (actor: Actor) => string>> = {
  finding: (actor) => `
    SELECT f.id::text AS id, f.site_id, f.due_on, f.worker_id, coalesce(j.name, i.name) AS what, f.id AS target_id, f.kind AS finding_kind, f.criterion
    FROM findings f LEFT JOIN jobs j ON j.id = f.job_id LEFT JOIN instruments i ON i.id = f.instrument_id
    WHERE ${canBeLate("f")} AND f.due_on IS NOT NULL AND f.kind NOT IN ('instrument', 'fit-due')
      AND ${visible(findingPolicy, actor, "f")}`,
  measure: (actor) => `
    SELECT m.id::text, f.site_id, m.planned_on, f.worker_id, m.what, f.id, f.kind, f.criterion
    FROM finding_measures m JOIN findings f ON f.id = m.finding_id
    WHERE m.done_on IS NULL AND m.struck_reason IS NULL AND m.planned_on IS NOT NULL AND f.state <> 'closed'
      AND ${visible(findingPolicy, actor, "f")}`,
  notice: (actor) => `
    SELECT l.id::text, l.site_id, l.due_on, l.worker_id, NULL, l.id, NULL, NULL
    FROM result_letters l LEFT JOIN notices n ON n.id = l.notice_id
    WHERE n.state IS DISTINCT FROM 'sent' AND NOT EXISTS (SELECT 1 FROM notice_acknowledgements a WHERE a.letter_id = l.id)
      AND NOT EXISTS (SELECT 1 FROM result_letters x WHERE x.replaces_id = l.id) AND ${visible(letterPolicy, actor, "l")}`,
  monitoring: (actor) => `
    SELECT c.id::text, c.site_id, c.happened_on, NULL::uuid, c.what, c.id, NULL, NULL
    FROM workplace_changes c WHERE c.struck_reason IS NULL AND ${visible(surveyPolicy, actor, "c")} AND EXISTS (
      SELECT 1 FROM tasks t WHERE (t.id = c.task_id OR t.area_id = c.area_id
          OR EXISTS (SELECT 1 FROM job_tasks k WHERE k.job_id = c.job_id AND k.task_id = t.id))
        AND (SELECT max(v.effective_from) FROM task_levels v WHERE v.task_id = t.id) < c.happened_on)`,
  calibration: (actor) => `
    SELECT i.id::text, i.site_id, i.calibration_due_on, NULL::uuid, i.name, i.id, NULL, NULL
    FROM instruments i WHERE NOT i.is_archived AND i.calibration_due_on IS NOT NULL AND ${visible(programmePolicy, actor, "i")}`,
  "fit-test": (actor) => `
    SELECT concat(q.worker_id, ' ', q.model_id), q.site_id, q.due_on, q.worker_id, q.protector, q.worker_id, NULL, NULL
    FROM (${fitDues("TRUE")}) q JOIN workers w ON w.id = q.worker_id WHERE q.due_on IS NOT NULL AND ${visible(workerPolicy, actor, "w")}`,
  cushions: (actor) => `
    SELECT concat(i.id, ' ', part.name), i.site_id, last.on_date + part.every_days, i.worker_id, p.name, i.worker_id, NULL, NULL
    FROM protector_issues i JOIN workers w ON w.id = i.worker_id JOIN protector_models p ON p.id = i.model_id
    JOIN LATERAL (SELECT r.data FROM protector_model_revisions r WHERE r.model_id = i.model_id AND r.effective_from <= current_date
      ORDER BY r.effective_from DESC, r.number DESC LIMIT 1) d ON TRUE
    CROSS JOIN LATERAL (VALUES ('cushions', (d.data->>'cushionsEveryDays')::int), ('tips', (d.data->>'tipsEveryDays')::int)) part(name, every_days)
    CROSS JOIN LATERAL (SELECT coalesce(max(m.moved_on), i.issued_on) AS on_date FROM stock_moves m
      WHERE m.issue_id = i.id AND m.part = part.name AND m.kind = 'changed') last
    WHERE i.ended_on IS NULL AND part.every_days IS NOT NULL AND (w.left_on IS NULL OR w.left_on >= current_date) AND ${visible(fitPolicy, actor, "i")}`,
  training: (actor) => `
    SELECT q."workerId"::text, q."siteId", q."dueOn"::date, q."workerId", NULL, q."workerId", NULL, NULL
    FROM (${trainingDues(visible(workerPolicy, actor, "w"))}) q`,
};

export interface DutyCount {
  kind: DutyKind;
  /** Some of it is about somebody. */
  isPersonal: boolean;
  total: number;
  overdue: number;
  soon: number;
  later: number;
}

/** Days in which something is due soon. */
const SOON_DAYS = 30;

/** People for whom something is due at a site, each by the first of it, and what is due for nobody, kind by kind. */
export const countDuties = (actor: Actor, siteId: string): Promise<DutyCount[]> =>
  rows<DutyCount>(
    `WITH x AS (${(Object.keys(sources) as DutyKind[])
      .map(
        (kind) =>
          `SELECT '${kind}' AS kind, q.site_id, q.due_on, q.worker_id, q.id
           FROM (${sources[kind](actor)}) q (id, site_id, due_on, worker_id, what, target_id, finding_kind, criterion)`,
      )
      .join(" UNION ALL ")}),
     first AS (SELECT kind, bool_or(worker_id IS NOT NULL) AS is_personal, min(due_on) AS due_on FROM x
       WHERE site_id = :siteId GROUP BY kind, coalesce(worker_id::text, id))
     SELECT f.kind, bool_or(f.is_personal) AS "isPersonal", count(*)::int AS total, count(*) FILTER (WHERE f.due_on < t.date)::int AS overdue,
       count(*) FILTER (WHERE f.due_on BETWEEN t.date AND t.date + ${SOON_DAYS})::int AS soon,
       count(*) FILTER (WHERE f.due_on > t.date + ${SOON_DAYS})::int AS later
     FROM first f CROSS JOIN (SELECT (now() AT TIME ZONE s.time_zone)::date AS date FROM sites s WHERE s.id = :siteId) t GROUP BY f.kind`,
    { siteId, duties: TRAINING_DUTIES },
  );

type Found = Omit<DutyItem, "worker"> & { workerId: string | null; workerName: string | null };

/** What is due, worst first: the longest overdue, then the soonest. */
export async function listDuties(
  actor: Actor,
  filter: z.output<typeof DutyFilter>,
): Promise<z.input<typeof DutyPage>> {
  const cursor = decodeCursor(filter.cursor, 2);
  const kinds = filter.kind ? [filter.kind] : (Object.keys(sources) as DutyKind[]);
  const conditions = [
    "TRUE",
    filter.siteId && "x.site_id = :siteId",
    filter.from && "x.due_on >= :from",
    filter.to && "x.due_on <= :to",
    cursor && "(x.due_on, x.key) > (CAST(:afterDate AS date), :afterKey)",
  ].filter(Boolean);
  const found = await rows<Found>(
    `WITH x AS (${kinds
      .map(
        (kind) =>
          `SELECT '${kind}' AS kind, '${kind} ' || q.id AS key, q.site_id, q.due_on, q.worker_id, q.what, q.target_id, q.finding_kind, q.criterion
           FROM (${sources[kind](actor)}) q (id, site_id, due_on, worker_id, what, target_id, finding_kind, criterion)`,
      )
      .join(" UNION ALL ")})
     SELECT x.key, x.kind, x.site_id AS "siteId", s.name AS "siteName", x.due_on::text AS "dueOn",
       x.due_on < (now() AT TIME ZONE s.time_zone)::date AS "isOverdue", w.id AS "workerId", w.name AS "workerName", x.what, x.target_id AS "targetId",
       x.finding_kind AS "findingKind", x.criterion,
       (SELECT g.governing_rule_set FROM site_settings g WHERE g.site_id = s.id AND g.effective_from <= (now() AT TIME ZONE s.time_zone)::date
        ORDER BY g.effective_from DESC, g.number DESC LIMIT 1) AS "ruleSetKey"
     FROM x JOIN sites s ON s.id = x.site_id LEFT JOIN workers w ON w.id = x.worker_id
     WHERE ${conditions.join(" AND ")} ORDER BY x.due_on, x.key LIMIT :limit`,
    {
      duties: TRAINING_DUTIES,
      siteId: filter.siteId,
      from: filter.from,
      to: filter.to,
      afterDate: cursor?.[0] ?? null,
      afterKey: cursor?.[1] ?? null,
      limit: filter.limit + 1,
    },
  );
  return pageFrom(
    found.map(({ workerId, workerName, ...item }) => ({
      ...item,
      worker: workerId === null ? null : { id: workerId, name: workerName ?? "" },
    })),
    filter.limit,
    ({ dueOn, key }) => [dueOn, key],
  );
}
