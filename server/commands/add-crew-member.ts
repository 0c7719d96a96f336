import type { z } from "zod";
import type { MembershipInput } from "../../shared/schemas/crew";
import { recordAudit } from "../lib/audit";
import { daysFromTo, spanIssues } from "../lib/date-range";
import { execute, rows } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Crew, Worker } from "../models/worker";
import { isOwnRunningOn } from "../queries/attendance";
import { checkLoanFree } from "./lend-worker";

/** Somebody new in a crew. Of the crews of their own they are in one at a time: an earlier one ends the day before. */
export async function addCrewMember(
  actor: Actor,
  crew: Crew,
  worker: Worker,
  input: z.infer<typeof MembershipInput>,
): Promise<void> {
  const { fromDate, toDate, isLoan } = input;
  const issues = spanIssues(fromDate, toDate);
  if (fromDate < worker.hiredOn)
    issues.push(issue(["fromDate"], "before-hire", { hiredOn: worker.hiredOn }));
  if (worker.leftOn !== null && fromDate > worker.leftOn) {
    issues.push(issue(["fromDate"], "after-leaving", { leftOn: worker.leftOn }));
  }
  if (issues.length > 0) throw unprocessable(issues);
  if (isLoan) await checkLoanFree(worker.id, fromDate, toDate);
  const ended = isLoan
    ? []
    : await rows<{ crewId: string }>(
        `UPDATE crew_memberships m SET valid = daterange(lower(m.valid), CAST(:fromDate AS date)), revision = m.revision + 1
         WHERE m.crew_id <> :crewId AND ${isOwnRunningOn("m", ":workerId", "CAST(:fromDate AS date)")} RETURNING m.crew_id AS "crewId"`,
        { workerId: worker.id, crewId: crew.id, fromDate },
      );
  await execute("UPDATE crews SET revision = revision + 1 WHERE id = ANY ($1::uuid[])", [
    ended.map(({ crewId }) => crewId),
  ]);
  await execute(
    `INSERT INTO crew_memberships (organization_id, crew_id, worker_id, valid, is_loan) VALUES ($1, $2, $3, ${daysFromTo("$4", "$5")}, $6)`,
    [actor.organizationId, crew.id, worker.id, fromDate, toDate, isLoan],
  );
  await crew.update({ revision: crew.revision + 1 });
  await recordAudit(actor, {
    action: "add-crew-member",
    subjectKind: "crew",
    subjectId: crew.id,
    values: {
      ...input,
      ...(ended.length > 0 && { endedInCrews: ended.map(({ crewId }) => crewId) }),
    },
  });
}
