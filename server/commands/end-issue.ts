import type { z } from "zod";
import type { IssueEnd } from "../../shared/schemas/fit";
import { recordAudit } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { row } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { ProtectorIssue } from "../models/issue";
import { listAssignments } from "../queries/assignments";
import { endAssignment } from "./end-assignment";
import { followFits } from "./follow-fits";
import { moveStock, stockOf } from "./move-stock";

/**
 * A device that is back, lost, broken or replaced. What is back goes into the stock; where nothing takes its place, its
 * assignment ends with it.
 *
 * @throws AppError invalid
 */
export async function endIssue(
  actor: Actor,
  issued: ProtectorIssue,
  site: { timeZone: string },
  { endedOn, how }: z.infer<typeof IssueEnd>,
): Promise<void> {
  const { id, siteId, workerId, modelId, size, issuedOn } = issued;
  const today = todayAt(site.timeZone);
  if (endedOn > today) throw unprocessable([issue(["endedOn"], "in-the-future", { today })]);
  if (endedOn < issuedOn) throw unprocessable([issue(["endedOn"], "ends-before-start")]);
  await issued.update({ endedOn, endedHow: how, revision: issued.revision + 1 });
  if (how === "returned" && (await stockOf(siteId, modelId, size)) !== null)
    await moveStock(actor, {
      siteId,
      modelId,
      size,
      kind: "returned",
      quantity: 1,
      issueId: id,
      movedOn: endedOn,
    });
  await recordAudit(actor, {
    action: "end-issue",
    subjectKind: "protector-issue",
    subjectId: id,
    values: { workerId, modelId, endedOn, how },
  });
  if (how !== "replaced") await endItsAssignment(actor, issued, endedOn);
  await followFits(actor.organizationId, { workerId, modelId });
}

/** Only where no other device is out under it, and it has not ended by itself. */
async function endItsAssignment(
  actor: Actor,
  { id: issueId, assignmentId, modelId }: ProtectorIssue,
  endedOn: string,
): Promise<void> {
  const other = await row(
    `SELECT 1 AS one FROM protector_issues WHERE assignment_id = :assignmentId AND model_id = :modelId AND id <> :issueId AND ended_on IS NULL`,
    { assignmentId, modelId, issueId },
  );
  const [assignment] = await listAssignments(actor, { ids: [assignmentId] });
  if (other || !assignment || assignment.innerModelId !== modelId) return;
  if (assignment.toDate !== null || assignment.fromDate > endedOn) return;
  await endAssignment(actor, assignment, endedOn);
}
