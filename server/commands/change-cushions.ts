import type { z } from "zod";
import type { ReplacementInput } from "../../shared/schemas/stock";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { ProtectorIssue } from "../models/issue";
import { moveStock } from "./move-stock";

/**
 * Cushions or tips changed on a device that a worker has: they leave the stock, and the next change counts from here.
 *
 * @throws AppError invalid.
 */
export async function changeCushions(
  actor: Actor,
  found: ProtectorIssue,
  site: { timeZone: string },
  { part, changedOn }: z.infer<typeof ReplacementInput>,
): Promise<void> {
  const today = todayAt(site.timeZone);
  const issues = dateIssues(["changedOn"], changedOn);
  if (changedOn > today) issues.push(issue(["changedOn"], "in-the-future", { today }));
  if (changedOn < found.issuedOn)
    issues.push(issue(["changedOn"], "before-issue", { issuedOn: found.issuedOn }));
  if (issues.length > 0) throw unprocessable(issues);
  const { siteId, modelId, size, id: issueId } = found;
  await moveStock(actor, {
    siteId,
    modelId,
    size,
    part,
    kind: "changed",
    quantity: -1,
    issueId,
    movedOn: changedOn,
  });
  await recordAudit(actor, {
    action: "change-cushions",
    subjectKind: "protector-issue",
    subjectId: found.id,
    values: { part, changedOn },
  });
}
