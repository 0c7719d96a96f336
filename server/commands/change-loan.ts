import { recordAudit } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { checkSpan, daysFromTo } from "../lib/date-range";
import { execute, row } from "../lib/db";
import { AppError, notFound } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import type { Crew } from "../models/worker";
import { checkLoanFree } from "./lend-worker";

interface LoanRow {
  id: string;
  workerId: string;
  toCrewId: string;
  fromDate: string;
  toDate: string | null;
  revision: number;
  timeZone: string;
}

/** A loan of one of this crew's own members, locked. */
async function loanOf(crew: Crew, id: string): Promise<LoanRow> {
  const found = await row<LoanRow>(
    `SELECT m.id, m.worker_id AS "workerId", m.crew_id AS "toCrewId", lower(m.valid)::text AS "fromDate", (upper(m.valid) - 1)::text AS "toDate", m.revision, s.time_zone AS "timeZone"
     FROM crew_memberships m JOIN crews c ON c.id = m.crew_id JOIN sites s ON s.id = c.site_id
     WHERE m.id = :id AND m.is_loan AND m.crew_id <> :crewId AND EXISTS (SELECT 1 FROM crew_memberships o
       WHERE o.worker_id = m.worker_id AND o.crew_id = :crewId AND NOT o.is_loan AND o.valid && m.valid) FOR UPDATE OF m`,
    { id, crewId: crew.id },
  );
  if (!found) throw notFound();
  return found;
}

const touchCrew = (id: string) =>
  execute("UPDATE crews SET revision = revision + 1 WHERE id = $1", [id]);

/** The last day of a loan. */
export async function endLoan(
  actor: Actor,
  crew: Crew,
  id: string,
  toDate: string,
  seenRevision: number,
  current: () => Promise<unknown>,
): Promise<void> {
  const loan = await loanOf(crew, id);
  await requireRevision(loan, seenRevision, current);
  checkSpan(loan.fromDate, toDate);
  if (loan.toDate === toDate) return;
  await checkLoanFree(loan.workerId, loan.fromDate, toDate, id);
  await execute(
    `UPDATE crew_memberships SET valid = ${daysFromTo("$2", "$3")}, revision = revision + 1 WHERE id = $1`,
    [id, loan.fromDate, toDate],
  );
  await touchCrew(loan.toCrewId);
  await recordAudit(actor, {
    action: "end-loan",
    subjectKind: "crew",
    subjectId: crew.id,
    values: {
      workerId: loan.workerId,
      crewId: loan.toCrewId,
      fromDate: loan.fromDate,
      toDate: { from: loan.toDate, to: toDate },
    },
  });
}

/**
 * A loan that has not begun is taken back; one that has is ended.
 *
 * @throws AppError loan-has-begun
 */
export async function takeBackLoan(
  actor: Actor,
  crew: Crew,
  id: string,
  seenRevision: number,
  current: () => Promise<unknown>,
): Promise<void> {
  const loan = await loanOf(crew, id);
  await requireRevision(loan, seenRevision, current);
  if (loan.fromDate < todayAt(loan.timeZone)) throw new AppError("loan-has-begun", 409);
  await execute("DELETE FROM crew_memberships WHERE id = $1", [id]);
  await touchCrew(loan.toCrewId);
  await recordAudit(actor, {
    action: "take-back-loan",
    subjectKind: "crew",
    subjectId: crew.id,
    values: {
      workerId: loan.workerId,
      crewId: loan.toCrewId,
      fromDate: loan.fromDate,
      toDate: loan.toDate,
    },
  });
}
