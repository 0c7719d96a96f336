import { addDays } from "../../shared/time/zone";
import { recordAudit } from "../lib/audit";
import { checkSpan, daysFromTo } from "../lib/date-range";
import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";
import type { AssignmentRow } from "../queries/assignments";
import { followFits } from "./follow-fits";
import { markDaysStale } from "./mark-days-stale";

/**
 * The last day of an assignment, earlier or later than it was; the days between are judged again, and findings on the fit
 * of what is worn no longer close.
 */
export async function endAssignment(
  actor: Actor,
  assignment: AssignmentRow,
  toDate: string,
): Promise<void> {
  const { id, workerId, fromDate, toDate: before } = assignment;
  checkSpan(fromDate, toDate);
  if (before === toDate) return;
  await execute(
    `UPDATE assignments SET valid = ${daysFromTo("$2", "$3")}, revision = revision + 1 WHERE id = $1`,
    [id, fromDate, toDate],
  );
  const values = { assignmentId: id, toDate: { from: before, to: toDate } };
  await recordAudit(actor, {
    action: "end-assignment",
    subjectKind: "worker",
    subjectId: workerId,
    values,
  });
  const firstMoved = addDays(before !== null && before < toDate ? before : toDate, 1);
  await markDaysStale(actor.organizationId, { workerId, fromDate: firstMoved });
  await followFits(actor.organizationId, { workerId, modelId: assignment.innerModelId });
}
