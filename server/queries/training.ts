import type { z } from "zod";
import { DUTIES, dutyOf } from "../../shared/rule-sets/duties";
import type {
  TrainingDue,
  TrainingDuePage,
  TrainingFilter,
  TrainingPage,
  TrainingRow,
  TrainingView,
  WorkerTraining,
} from "../../shared/schemas/training";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { row, rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import { ownTrainingPolicy, trainingPolicy, workerPolicy } from "../policies";

const SELECT_SESSIONS = `SELECT t.id, t.site_id AS "siteId", s.name AS "siteName", t.held_on::text AS "heldOn", t.title, t.duration_min AS "durationMin",
    t.file_id AS "fileId", f.name AS "fileName", (SELECT count(*)::int FROM training_attendances a WHERE a.session_id = t.id) AS attendees,
    t.struck_reason AS "struckReason", u.name AS "authorName", t.revision
  FROM training_sessions t JOIN sites s ON s.id = t.site_id LEFT JOIN files f ON f.id = t.file_id LEFT JOIN users u ON u.id = t.author_id`;

type Found = Omit<TrainingRow, "can">;

const present = (actor: Actor, found: Found): TrainingRow => ({
  ...found,
  can: abilities(trainingPolicy, actor, found),
});

/** Trainings that were held, the latest first. */
export async function listTrainings(
  actor: Actor,
  filter: z.output<typeof TrainingFilter>,
): Promise<z.input<typeof TrainingPage>> {
  const cursor = decodeCursor(filter.cursor, 2);
  const conditions = [visible(trainingPolicy, actor, "t")];
  if (filter.siteId) conditions.push("t.site_id = :siteId");
  if (cursor)
    conditions.push("(t.held_on, t.id) < (CAST(:beforeDate AS date), CAST(:beforeId AS uuid))");
  const found = await rows<Found>(
    `${SELECT_SESSIONS} WHERE ${conditions.join(" AND ")} ORDER BY t.held_on DESC, t.id DESC LIMIT :limit`,
    {
      siteId: filter.siteId,
      beforeDate: cursor?.[0] ?? null,
      beforeId: cursor?.[1] ?? null,
      limit: filter.limit + 1,
    },
  );
  return pageFrom(
    found.map((one) => present(actor, one)),
    filter.limit,
    ({ heldOn, id }) => [heldOn, id],
  );
}

/** One training with who was there. */
export async function trainingView(actor: Actor, id: string): Promise<TrainingView> {
  const found = only(await rows<Found>(`${SELECT_SESSIONS} WHERE t.id = :id`, { id }));
  const attendance = await rows<TrainingView["attendance"][number]>(
    `SELECT w.id, w.name, w.employee_number AS "employeeNumber" FROM training_attendances a JOIN workers w ON w.id = a.worker_id
     WHERE a.session_id = :id ORDER BY w.name, w.id`,
    { id },
  );
  return { ...present(actor, found), attendance };
}

/** The duty to train by rule set, for a query: which criteria it hangs from, its term and its interval. */
export const TRAINING_DUTIES = JSON.stringify(
  Object.keys(DUTIES).flatMap((ruleSetKey) => {
    const duty = dutyOf(ruleSetKey, "training");
    return duty
      ? [
          {
            ruleSetKey,
            over: `$[*] ? (${duty.criterionIds.map((id) => `@.criterionId == "${id}"`).join(" || ")}) ? (@.verdict == "over")`,
            withinDays: duty.withinDays,
            everyMonths: duty.everyMonths,
          },
        ]
      : [];
  }),
);

/**
 * Workers who are owed training, with when: from the first day within a year on which they were over what the duty hangs
 * from, and again so many months after the last one. Whoever was trained under rules that set no interval is owed none.
 */
export const trainingDues = (condition: string) => `
  WITH duty AS (SELECT * FROM jsonb_to_recordset(CAST(:duties AS jsonb)) AS x("ruleSetKey" text, over jsonpath, "withinDays" int, "everyMonths" int)),
  due AS (
    SELECT w.id AS "workerId", w.name AS "workerName", w.employee_number AS "employeeNumber", w.site_id AS "siteId", s.name AS "siteName",
      k."ruleSetKey", first.date AS exposed, last.held_on AS trained,
      CASE WHEN last.held_on IS NULL THEN first.date + k."withinDays" ELSE (last.held_on + make_interval(months => k."everyMonths"))::date END AS due
    FROM workers w JOIN sites s ON s.id = w.site_id
    CROSS JOIN LATERAL (SELECT (now() AT TIME ZONE s.time_zone)::date AS date) today
    JOIN LATERAL (SELECT g.governing_rule_set FROM site_settings g WHERE g.site_id = s.id AND g.effective_from <= today.date
      ORDER BY g.effective_from DESC, g.number DESC LIMIT 1) rules ON TRUE
    JOIN duty k ON k."ruleSetKey" = rules.governing_rule_set
    JOIN LATERAL (SELECT d.date FROM days d JOIN day_results r ON r.id = d.current_result_id
      WHERE d.worker_id = w.id AND d.date > today.date - 365 AND r.governing_rule_set = k."ruleSetKey"
        AND jsonb_path_exists(r.criteria->'governing', k.over) ORDER BY d.date LIMIT 1) first ON TRUE
    LEFT JOIN LATERAL (SELECT t.held_on FROM training_attendances a JOIN training_sessions t ON t.id = a.session_id
      WHERE a.worker_id = w.id AND t.struck_reason IS NULL ORDER BY t.held_on DESC LIMIT 1) last ON TRUE
    WHERE (w.left_on IS NULL OR w.left_on >= today.date) AND ${condition})
  SELECT "workerId", "workerName", "employeeNumber", "siteId", "siteName", "ruleSetKey", exposed::text AS "exposedOn", trained::text AS "trainedOn",
    due::text AS "dueOn" FROM due WHERE due IS NOT NULL`;

/** Who is owed training, longest overdue first. */
export async function listTrainingDues(
  actor: Actor,
  filter: z.output<typeof TrainingFilter>,
): Promise<z.input<typeof TrainingDuePage>> {
  const cursor = decodeCursor(filter.cursor, 2);
  const after = cursor
    ? `AND (due, "workerId") > (CAST(:afterDate AS date), CAST(:afterId AS uuid))`
    : "";
  const found = await rows<TrainingDue>(
    `${trainingDues(`${visible(workerPolicy, actor, "w")} ${filter.siteId ? "AND w.site_id = :siteId" : ""}`)} ${after} ORDER BY due, "workerId" LIMIT :limit`,
    {
      duties: TRAINING_DUTIES,
      siteId: filter.siteId,
      afterDate: cursor?.[0] ?? null,
      afterId: cursor?.[1] ?? null,
      limit: filter.limit + 1,
    },
  );
  return pageFrom(found, filter.limit, ({ dueOn, workerId }) => [dueOn, workerId]);
}

/** The trainings of one worker whom the actor may see, and when the next is due. */
export async function workerTraining(actor: Actor, workerId: string): Promise<WorkerTraining> {
  const held = await rows<WorkerTraining["rows"][number]>(
    `SELECT t.id, t.held_on::text AS "heldOn", t.title, t.duration_min AS "durationMin", t.file_id AS "fileId", f.name AS "fileName"
     FROM training_attendances a JOIN training_sessions t ON t.id = a.session_id LEFT JOIN files f ON f.id = t.file_id
     WHERE a.worker_id = :workerId AND t.struck_reason IS NULL AND ${visible(ownTrainingPolicy, actor, "t")} ORDER BY t.held_on DESC, t.id LIMIT 100`,
    { workerId },
  );
  const due = await row<TrainingDue>(trainingDues("w.id = :workerId"), {
    duties: TRAINING_DUTIES,
    workerId,
  });
  return { rows: held, due: due && { dueOn: due.dueOn, ruleSetKey: due.ruleSetKey } };
}

/** Workers of a site by their employee numbers. */
export const workersByNumber = (siteId: string, employeeNumbers: readonly string[]) =>
  rows<{ id: string; employeeNumber: string }>(
    `SELECT w.id, w.employee_number AS "employeeNumber" FROM workers w WHERE w.site_id = $1 AND w.employee_number = ANY ($2::text[])`,
    [siteId, employeeNumbers],
  );
