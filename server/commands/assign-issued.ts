import type { AssignmentInput } from "../../shared/schemas/worker";
import { addDays } from "../../shared/time/zone";
import { recordAudit } from "../lib/audit";
import { execute, row } from "../lib/db";
import { only } from "../lib/only";
import type { Actor } from "../lib/policy";
import type { Worker } from "../models/worker";
import { assignProtector } from "./assign-protector";
import { markDaysStale } from "./mark-days-stale";

interface InForce {
  id: string;
  fromDate: string;
  toDate: string | null;
  isSame: boolean;
  name: string;
}

export interface AssignedIssue {
  readonly assignmentId: string;
  /** What was in force for this use and ends with it; null: nothing, or the same device goes on. */
  readonly replacedName: string | null;
}

/**
 * The assignment under which a device is handed out, from that day on: the one in force where it is of this model, size
 * and use already, else a new one, which the earlier one gives way to. What was assigned on the same day is corrected,
 * as a hand at the desk that took the wrong box.
 *
 * @throws AppError as assignProtector, its dates under `issuedOn`.
 */
export async function assignIssued(
  actor: Actor,
  worker: Pick<Worker, "id" | "hiredOn" | "leftOn">,
  input: AssignmentInput,
): Promise<AssignedIssue> {
  const { taskId, areaId, innerModelId, size, fromDate } = input;
  const inForce = await row<InForce>(
    `SELECT a.id, lower(a.valid)::text AS "fromDate", (upper(a.valid) - 1)::text AS "toDate",
       a.inner_model_id = :innerModelId AND a.outer_model_id IS NULL AND a.size IS NOT DISTINCT FROM CAST(:size AS text) AS "isSame",
       concat_ws(' + ', i.name, o.name) AS name
     FROM assignments a JOIN protector_models i ON i.id = a.inner_model_id LEFT JOIN protector_models o ON o.id = a.outer_model_id
     WHERE a.worker_id = :workerId AND a.valid @> CAST(:fromDate AS date)
       AND a.task_id IS NOT DISTINCT FROM CAST(:taskId AS uuid) AND a.area_id IS NOT DISTINCT FROM CAST(:areaId AS uuid)`,
    { workerId: worker.id, taskId, areaId, innerModelId, size, fromDate },
  );
  const replacedName = inForce && !inForce.isSame ? inForce.name : null;
  if (inForce?.isSame && inForce.toDate === null) return { assignmentId: inForce.id, replacedName };
  if (inForce?.fromDate === fromDate)
    return { assignmentId: await correct(actor, worker.id, inForce, input), replacedName };
  if (inForce && inForce.toDate !== null) await endBefore(actor, worker.id, inForce, fromDate);
  const ids = await assignProtector(actor, [worker], input, {
    field: (name) => [name === "fromDate" ? "issuedOn" : name],
    worker: () => ["issuedOn"],
  });
  return { assignmentId: only(ids), replacedName };
}

async function correct(
  actor: Actor,
  workerId: string,
  { id }: InForce,
  input: AssignmentInput,
): Promise<string> {
  const { innerModelId, size, fromDate } = input;
  await execute(
    `UPDATE assignments SET inner_model_id = $2, outer_model_id = NULL, size = $3, audio_db = NULL, valid = daterange($4::date, NULL),
       revision = revision + 1 WHERE id = $1`,
    [id, innerModelId, size, fromDate],
  );
  await recordAudit(actor, {
    action: "assign-protector",
    subjectKind: "worker",
    subjectId: workerId,
    values: { assignmentId: id, ...input },
  });
  await markDaysStale(actor.organizationId, { workerId, fromDate });
  return id;
}

async function endBefore(
  actor: Actor,
  workerId: string,
  { id, toDate }: InForce,
  fromDate: string,
): Promise<void> {
  const lastDay = addDays(fromDate, -1);
  await execute(
    "UPDATE assignments SET valid = daterange(lower(valid), $2::date), revision = revision + 1 WHERE id = $1",
    [id, fromDate],
  );
  await recordAudit(actor, {
    action: "end-assignment",
    subjectKind: "worker",
    subjectId: workerId,
    values: { assignmentId: id, toDate: { from: toDate, to: lastDay } },
  });
}
