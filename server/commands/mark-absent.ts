import type { AbsenceInput } from "../../shared/schemas/attendance";
import { recordAudit } from "../lib/audit";
import { daysFromTo, spanIssues } from "../lib/date-range";
import { execute, row } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Crew, Worker } from "../models/worker";

/**
 * Somebody of the crew is not in on these days. Of somebody lent to the crew it is said only for days of the loan.
 *
 * @throws AppError invalid; absence-overlaps by the database
 */
export async function markAbsent(
  actor: Actor,
  crew: Crew,
  worker: Worker,
  { fromDate, toDate }: AbsenceInput,
): Promise<void> {
  const issues = spanIssues(fromDate, toDate);
  const membership = await row<{ isLoan: boolean; lastDate: string | null }>(
    `SELECT is_loan AS "isLoan", (upper(valid) - 1)::text AS "lastDate" FROM crew_memberships
     WHERE crew_id = :crewId AND worker_id = :workerId AND valid @> CAST(:fromDate AS date) LIMIT 1`,
    { crewId: crew.id, workerId: worker.id, fromDate },
  );
  if (!membership) issues.push(issue(["workerId"], "not-in-crew"));
  else if (membership.isLoan && (toDate === null || toDate > (membership.lastDate ?? toDate)))
    issues.push(issue(["toDate"], "beyond-loan"));
  const worked = await row<{ date: string }>(
    `SELECT min(date)::text AS date FROM shifts WHERE worker_id = :workerId AND NOT is_void
       AND date >= CAST(:fromDate AS date) AND (CAST(:toDate AS date) IS NULL OR date <= CAST(:toDate AS date)) HAVING count(*) > 0`,
    { workerId: worker.id, fromDate, toDate },
  );
  if (worked) issues.push(issue(["fromDate"], "shift-entered", { date: worked.date }));
  if (issues.length > 0) throw unprocessable(issues);
  await execute(
    `INSERT INTO absence_spans (organization_id, crew_id, worker_id, valid, author_id) VALUES ($1, $2, $3, ${daysFromTo("$4", "$5")}, $6)`,
    [actor.organizationId, crew.id, worker.id, fromDate, toDate, actor.userId],
  );
  await recordAudit(actor, {
    action: "mark-absent",
    subjectKind: "crew",
    subjectId: crew.id,
    values: { workerId: worker.id, fromDate, toDate },
  });
}
