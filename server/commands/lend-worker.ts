import type { LoanInput } from "../../shared/schemas/attendance";
import { recordAudit } from "../lib/audit";
import { daysFromTo, spanIssues } from "../lib/date-range";
import { execute, row } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Crew, Worker } from "../models/worker";
import { lockWorkers } from "./check-shift";

/**
 * One loan at a time: on no day is anybody lent to two crews.
 *
 * @throws AppError loan-overlaps
 */
export async function checkLoanFree(
  workerId: string,
  fromDate: string,
  toDate: string | null,
  exceptId: string | null = null,
): Promise<void> {
  await lockWorkers([workerId]);
  const other = await row<object>(
    `SELECT 1 FROM crew_memberships WHERE worker_id = :workerId AND is_loan AND id IS DISTINCT FROM CAST(:exceptId AS uuid)
       AND valid && daterange(CAST(:fromDate AS date), CAST(:toDate AS date), '[]') LIMIT 1`,
    { workerId, fromDate, toDate, exceptId },
  );
  if (other) throw new AppError("loan-overlaps", 409);
}

/** A member of a crew works with another crew of the site from a day to a day. */
export async function lendWorker(
  actor: Actor,
  crew: Crew,
  worker: Worker,
  to: Crew,
  { fromDate, toDate }: LoanInput,
): Promise<void> {
  const issues = spanIssues(fromDate, toDate);
  if (to.id === crew.id || to.isArchived) issues.push(issue(["crewId"], "other-crew"));
  if (issues.length > 0) throw unprocessable(issues);
  const own = await row<object>(
    `SELECT 1 FROM crew_memberships WHERE crew_id = :crewId AND worker_id = :workerId AND NOT is_loan
       AND valid @> daterange(CAST(:fromDate AS date), CAST(:toDate AS date), '[]') LIMIT 1`,
    { crewId: crew.id, workerId: worker.id, fromDate, toDate },
  );
  if (!own) throw unprocessable([issue(["workerId"], "not-in-crew")]);
  await checkLoanFree(worker.id, fromDate, toDate);
  const away = await row<{ fromDate: string; toDate: string | null }>(
    `SELECT lower(valid)::text AS "fromDate", (upper(valid) - 1)::text AS "toDate" FROM absence_spans
     WHERE worker_id = :workerId AND NOT is_struck AND valid && daterange(CAST(:fromDate AS date), CAST(:toDate AS date), '[]')
     ORDER BY lower(valid) LIMIT 1`,
    { workerId: worker.id, fromDate, toDate },
  );
  if (away)
    throw unprocessable([
      issue(["fromDate"], "not-in-then", {
        fromDate: away.fromDate,
        ...(away.toDate !== null && { toDate: away.toDate }),
      }),
    ]);
  await execute(
    `INSERT INTO crew_memberships (organization_id, crew_id, worker_id, valid, is_loan) VALUES ($1, $2, $3, ${daysFromTo("$4", "$5")}, TRUE)`,
    [actor.organizationId, to.id, worker.id, fromDate, toDate],
  );
  await execute("UPDATE crews SET revision = revision + 1 WHERE id = $1", [to.id]);
  await recordAudit(actor, {
    action: "lend-worker",
    subjectKind: "crew",
    subjectId: crew.id,
    values: { workerId: worker.id, crewId: to.id, fromDate, toDate },
  });
}
