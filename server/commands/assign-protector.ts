import { randomUUID } from "node:crypto";
import type { ProblemIssue } from "../../shared/schemas/problem";
import type { AssignmentInput } from "../../shared/schemas/worker";
import { addDays } from "../../shared/time/zone";
import { recordAudit } from "../lib/audit";
import { daysFromTo, spanIssues } from "../lib/date-range";
import { execute, rows } from "../lib/db";
import { issue, notFound, unprocessable } from "../lib/errors";
import { type Actor, findVisible, visible } from "../lib/policy";
import { ProtectorModel } from "../models/protector";
import { Area } from "../models/site";
import { Task } from "../models/task";
import type { Worker } from "../models/worker";
import { programmePolicy, protectorPolicy } from "../policies";
import { barsToGiving } from "../queries/barred";
import { barCode } from "./bar-code";
import { markDaysStale } from "./mark-days-stale";

type Person = Pick<Worker, "id" | "hiredOn" | "leftOn">;

/** Where an issue of the assignment, or of one worker in it, stands in the request. */
export interface Paths {
  readonly field: (name: string) => ProblemIssue["path"];
  readonly worker: (index: number, name: string) => ProblemIssue["path"];
}

/**
 * The same protector for these workers, whose rows are locked: all of them or none. An open assignment of the same use
 * that began earlier ends the day before. Returns the new ids.
 *
 * @throws AppError not-found, invalid, or assignments-overlap by the database's own constraint.
 */
export async function assignProtector(
  actor: Actor,
  workers: readonly Person[],
  input: AssignmentInput,
  paths: Paths,
): Promise<string[]> {
  await checkAssignment(actor, workers, input, paths);
  const ids: string[] = [];
  for (const worker of workers) {
    await endEarlier(actor, worker.id, input);
    const id = randomUUID();
    await execute(
      `INSERT INTO assignments (id, organization_id, worker_id, task_id, area_id, inner_model_id, outer_model_id, valid, assigned_by, size, audio_db)
       VALUES ($1, $2, $3, $4, $5, $6, $7, ${daysFromTo("$8", "$9")}, $10, $11, $12)`,
      [
        id,
        actor.organizationId,
        worker.id,
        input.taskId,
        input.areaId,
        input.innerModelId,
        input.outerModelId,
        input.fromDate,
        input.toDate,
        actor.userId,
        input.size,
        input.audioDb,
      ],
    );
    await recordAudit(actor, {
      action: "assign-protector",
      subjectKind: "worker",
      subjectId: worker.id,
      values: { assignmentId: id, ...input },
    });
    await markDaysStale(actor.organizationId, { workerId: worker.id, fromDate: input.fromDate });
    ids.push(id);
  }
  return ids;
}

/**
 * The same protector for many, as assignProtector; whoever has it for this use throughout that time is left as they are,
 * whatever the size where none is named. Nobody is given what is out of the question for them. Returns the new ids, and
 * the workers left out.
 *
 * @throws AppError as assignProtector.
 */
export async function assignToMany(
  actor: Actor,
  workers: readonly Worker[],
  input: AssignmentInput,
  paths: Paths,
): Promise<{ ids: string[]; alreadyHad: string[] }> {
  const holders = new Set(await holdersOf(workers, input));
  const without = [...workers.entries()].filter(([, { id }]) => !holders.has(id));
  const bars = await barsToGiving(
    actor,
    without.map(([, worker]) => worker),
    input,
  );
  const barred = without.flatMap(([index, { id }]) => {
    const bar = bars.get(id);
    return bar ? [issue(paths.worker(index, "innerModelId"), barCode(bar))] : [];
  });
  if (barred.length > 0) throw unprocessable(barred);
  const ids =
    without.length === 0
      ? []
      : await assignProtector(
          actor,
          without.map(([, worker]) => worker),
          input,
          {
            field: paths.field,
            worker: (index, name) => paths.worker(without[index]?.[0] ?? index, name),
          },
        );
  return { ids, alreadyHad: [...holders] };
}

async function holdersOf(workers: readonly Person[], input: AssignmentInput): Promise<string[]> {
  const { taskId, areaId, innerModelId, outerModelId, size, audioDb, fromDate, toDate } = input;
  const found = await rows<{ workerId: string }>(
    `SELECT a.worker_id AS "workerId" FROM assignments a WHERE a.worker_id IN (:workerIds) AND ${sameUse}
       AND a.inner_model_id = :innerModelId AND a.outer_model_id IS NOT DISTINCT FROM CAST(:outerModelId AS uuid)
       AND (CAST(:size AS text) IS NULL OR a.size = :size) AND (CAST(:audioDb AS float8) IS NULL OR a.audio_db = :audioDb)
       AND a.valid @> ${daysFromTo(":fromDate", ":toDate")}`,
    {
      workerIds: workers.map(({ id }) => id),
      taskId,
      areaId,
      innerModelId,
      outerModelId,
      size,
      audioDb,
      fromDate,
      toDate,
    },
  );
  return found.map(({ workerId }) => workerId);
}

async function checkAssignment(
  actor: Actor,
  workers: readonly Person[],
  input: AssignmentInput,
  paths: Paths,
): Promise<void> {
  const { fromDate, toDate, taskId, areaId } = input;
  if (taskId !== null) await findVisible(Task, programmePolicy, taskId, actor);
  if (areaId !== null) await findVisible(Area, programmePolicy, areaId, actor);
  const issues = [
    ...spanIssues(fromDate, toDate).map((found) => ({
      ...found,
      path: paths.field(String(found.path[0])),
    })),
    ...(await modelIssues(actor, input, paths)),
    ...workers.flatMap(({ hiredOn, leftOn }, index) => [
      ...(fromDate < hiredOn
        ? [issue(paths.worker(index, "fromDate"), "before-hire", { hiredOn })]
        : []),
      ...(leftOn !== null && fromDate > leftOn
        ? [issue(paths.worker(index, "fromDate"), "after-leaving", { leftOn })]
        : []),
    ]),
    ...(await overlapIssues(workers, input, paths)),
  ];
  if (issues.length > 0) throw unprocessable(issues);
}

async function modelIssues(
  actor: Actor,
  input: AssignmentInput,
  paths: Paths,
): Promise<ProblemIssue[]> {
  const worn = { innerModelId: input.innerModelId, outerModelId: input.outerModelId };
  const ids = Object.values(worn).filter((id) => id !== null);
  const found = await rows<{ id: string; isArchived: boolean; effectiveFrom: string }>(
    `SELECT m.id, m.is_archived AS "isArchived", (SELECT min(r.effective_from) FROM protector_model_revisions r WHERE r.model_id = m.id)::text AS "effectiveFrom"
     FROM ${ProtectorModel.tableName} m WHERE m.id IN (:ids) AND ${visible(protectorPolicy, actor, "m")}`,
    { ids },
  );
  const models = new Map(found.map((model) => [model.id, model]));
  return Object.entries(worn).flatMap(([name, id]) => {
    if (id === null) return [];
    const model = models.get(id);
    if (!model) throw notFound();
    const { isArchived, effectiveFrom } = model;
    return [
      ...(isArchived ? [issue(paths.field(name), "protector-archived")] : []),
      ...(effectiveFrom > input.fromDate
        ? [issue(paths.field(name), "protector-data-later", { effectiveFrom })]
        : []),
    ];
  });
}

/** In SQL: the assignments of the same use. The values are `:taskId` and `:areaId`. */
const sameUse =
  "a.task_id IS NOT DISTINCT FROM CAST(:taskId AS uuid) AND a.area_id IS NOT DISTINCT FROM CAST(:areaId AS uuid)";

/** What stands in the way in spite of closing an earlier open one. The database holds it against two at once. */
async function overlapIssues(
  workers: readonly Person[],
  input: AssignmentInput,
  paths: Paths,
): Promise<ProblemIssue[]> {
  const { taskId, areaId, fromDate, toDate } = input;
  const found = await rows<{ workerId: string; fromDate: string; toDate: string | null }>(
    `SELECT a.worker_id AS "workerId", lower(a.valid)::text AS "fromDate", (upper(a.valid) - 1)::text AS "toDate"
     FROM assignments a WHERE a.worker_id IN (:workerIds) AND ${sameUse} AND a.valid && ${daysFromTo(":fromDate", ":toDate")}
       AND NOT (upper_inf(a.valid) AND lower(a.valid) < CAST(:fromDate AS date))`,
    { workerIds: workers.map(({ id }) => id), taskId, areaId, fromDate, toDate },
  );
  const taken = new Map(found.map((span) => [span.workerId, span]));
  return workers.flatMap(({ id }, index) => {
    const span = taken.get(id);
    if (!span) return [];
    return [
      issue(paths.worker(index, "fromDate"), "assignments-overlap", {
        fromDate: span.fromDate,
        toDate: span.toDate ?? "",
      }),
    ];
  });
}

async function endEarlier(actor: Actor, workerId: string, input: AssignmentInput): Promise<void> {
  const { taskId, areaId, fromDate } = input;
  const ended = await rows<{ id: string }>(
    `UPDATE assignments a SET valid = daterange(lower(a.valid), CAST(:fromDate AS date)), revision = a.revision + 1
     WHERE a.worker_id = :workerId AND ${sameUse} AND upper_inf(a.valid) AND lower(a.valid) < CAST(:fromDate AS date) RETURNING a.id`,
    { workerId, taskId, areaId, fromDate },
  );
  for (const { id } of ended) {
    const values = { assignmentId: id, toDate: { from: null, to: addDays(fromDate, -1) } };
    await recordAudit(actor, {
      action: "end-assignment",
      subjectKind: "worker",
      subjectId: workerId,
      values,
    });
  }
}
