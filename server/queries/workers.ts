import type { z } from "zod";
import type { FittingFound } from "../../shared/schemas/fit";
import type {
  WorkerFilter,
  WorkerName,
  WorkerNameFilter,
  WorkerRow,
  WorkerView,
} from "../../shared/schemas/worker";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import { type Actor, visible } from "../lib/policy";
import { containsWords } from "../lib/search-words";
import {
  crewPolicy,
  dayPolicy,
  findingPolicy,
  requirementPolicy,
  workerNamePolicy,
  workerPolicy,
} from "../policies";
import { DAY_FIGURES_COLUMNS, type MaybeDayFiguresRow } from "../presenters/day-figures";
import { listAssignments } from "./assignments";

/** As the index on names and numbers has it. */
const nameAndNumber = (w: string) => `(lower(${w}.name) || ' ' || lower(${w}.employee_number))`;

export type WorkerListRow = Omit<WorkerRow, "lastDay"> & MaybeDayFiguresRow;
export type WorkerDetailRow = Omit<WorkerView, "can">;

const uuid = /^[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}$/;

/** One page in the order of names, each row with its last day and its open findings, in one query. */
export async function pageOfWorkers(actor: Actor, filter: z.infer<typeof WorkerFilter>) {
  const after = decodeCursor(filter.cursor, 2);
  if (after && !uuid.test(String(after[1])))
    throw unprocessable([issue(["cursor"], "cursor-unknown")]);
  const search = containsWords(nameAndNumber("w"), filter.search ?? "");
  const conditions = [
    "w.organization_id = :organizationId",
    visible(workerPolicy, actor, "w"),
    search.condition,
    filter.siteId && "w.site_id = :siteId",
    filter.crewId &&
      "EXISTS (SELECT 1 FROM crew_memberships m WHERE m.worker_id = w.id AND m.crew_id = :crewId AND m.valid @> current_date)",
    filter.includeLeft === "false" && "(w.left_on IS NULL OR w.left_on >= current_date)",
    after && "(w.name, w.id) > (:afterName, CAST(:afterId AS uuid))",
  ].filter(Boolean);
  const found = await rows<WorkerListRow>(
    `WITH page AS MATERIALIZED (
       SELECT w.* FROM workers w WHERE ${conditions.join(" AND ")} ORDER BY w.name, w.id LIMIT :limit)
     SELECT w.id, w.site_id AS "siteId", s.name AS "siteName", w.employee_number AS "employeeNumber", w.name, w.employer,
       w.employer_name AS "employerName", j.name AS "jobName", c.name AS "crewName", w.left_on::text AS "leftOn",
       f.count AS "openFindings", ${DAY_FIGURES_COLUMNS("r")}
     FROM page w JOIN sites s ON s.id = w.site_id LEFT JOIN jobs j ON j.id = w.job_id
     LEFT JOIN LATERAL (
       SELECT k.name FROM crew_memberships m JOIN crews k ON k.id = m.crew_id
       WHERE m.worker_id = w.id AND m.valid @> current_date ORDER BY m.is_loan, lower(m.valid) DESC LIMIT 1) c ON TRUE
     LEFT JOIN LATERAL (
       SELECT x.* FROM days d JOIN day_results x ON x.id = d.current_result_id
       WHERE d.worker_id = w.id AND ${visible(dayPolicy, actor, "d")} ORDER BY d.date DESC LIMIT 1) r ON TRUE
     CROSS JOIN LATERAL (
       SELECT count(*)::int AS count FROM findings q
       WHERE q.organization_id = w.organization_id AND q.worker_id = w.id AND q.state <> 'closed' AND ${visible(findingPolicy, actor, "q")}) f
     ORDER BY w.name, w.id`,
    {
      ...search.values,
      organizationId: actor.organizationId,
      siteId: filter.siteId ?? null,
      crewId: filter.crewId ?? null,
      afterName: after?.[0] ?? null,
      afterId: after?.[1] ?? null,
      limit: filter.limit + 1,
    },
  );
  return pageFrom(found, filter.limit, ({ name, id }) => [name, id]);
}

/** One worker with crews and assignments; the reason of a personal requirement only for whoever may read it. */
export async function findWorkerDetail(actor: Actor, id: string): Promise<WorkerDetailRow[]> {
  const found = await rows<Omit<WorkerDetailRow, "assignments">>(
    `SELECT w.id, w.site_id AS "siteId", s.name AS "siteName", w.job_id AS "jobId", j.name AS "jobName",
       w.employee_number AS "employeeNumber", w.name, w.employer, w.employer_name AS "employerName", w.language,
       w.hired_on::text AS "hiredOn", w.left_on::text AS "leftOn", w.must_wear AS "mustWear",
       w.personal_target_db AS "personalTargetDb", w.worn_gear AS "wornGear", q.reason AS "requirementReason", w.revision,
       EXISTS (SELECT 1 FROM users u WHERE u.worker_id = w.id AND u.revoked_at IS NULL) AS "hasSignIn",
       coalesce((SELECT json_agg(json_build_object('id', c.id, 'name', c.name, 'fromDate', lower(m.valid),
                   'toDate', upper(m.valid) - 1, 'isLoan', m.is_loan) ORDER BY lower(m.valid) DESC, c.name)
                 FROM crew_memberships m JOIN crews c ON c.id = m.crew_id
                 WHERE m.worker_id = w.id AND (${visible(crewPolicy, actor, "c")} OR ${actor.owns("m.worker_id") || "FALSE"})), '[]') AS crews
     FROM workers w JOIN sites s ON s.id = w.site_id LEFT JOIN jobs j ON j.id = w.job_id
     LEFT JOIN worker_requirement_reasons q ON q.worker_id = w.id AND ${visible(requirementPolicy, actor, "w")}
     WHERE w.id = :id AND ${visible(workerPolicy, actor, "w")}`,
    { id },
  );
  const assignments = found.length > 0 ? await listAssignments(actor, { workerId: id }) : [];
  return found.map((worker) => ({ ...worker, assignments }));
}

/** Whose employee number it is, or who has every word of the text in name or number; nobody who has left. */
export async function lookUpWorkers(actor: Actor, text: string): Promise<FittingFound["rows"]> {
  const search = containsWords(nameAndNumber("w"), text);
  const found = await rows<FittingFound["rows"][number]>(
    `SELECT w.id, w.name, w.employee_number AS "employeeNumber", s.name AS "siteName", lower(w.employee_number) = lower(:text) AS "isExact"
     FROM workers w JOIN sites s ON s.id = w.site_id
     WHERE ${visible(workerPolicy, actor, "w")} AND (${search.condition}) AND (w.left_on IS NULL OR w.left_on >= current_date)
     ORDER BY "isExact" DESC, w.name, w.id LIMIT 8`,
    { ...search.values, text },
  );
  const exact = found.filter(({ isExact }) => isExact);
  return exact.length > 0 ? exact : found;
}

/** Names and numbers only, the best part of a list to choose one person from. */
export async function findWorkerNames(
  actor: Actor,
  filter: z.output<typeof WorkerNameFilter>,
): Promise<WorkerName[]> {
  const search = containsWords(nameAndNumber("w"), filter.search);
  const isThere = "(w.left_on IS NULL OR w.left_on >= current_date)";
  return rows<WorkerName>(
    `SELECT w.id, w.site_id AS "siteId", w.name, w.employee_number AS "employeeNumber",
       EXISTS (SELECT 1 FROM users u WHERE u.worker_id = w.id AND u.revoked_at IS NULL) AS "hasSignIn",
       w.left_on::text AS "leftOn"
     FROM workers w WHERE w.organization_id = :organizationId AND ${visible(workerNamePolicy, actor, "w")} AND ${search.condition}
       ${filter.who === "all" ? "" : `AND ${isThere}`} ${filter.siteId ? "AND w.site_id = :siteId" : ""}
     ORDER BY ${isThere} DESC, w.name, w.id LIMIT 20`,
    { ...search.values, organizationId: actor.organizationId, siteId: filter.siteId },
  );
}
