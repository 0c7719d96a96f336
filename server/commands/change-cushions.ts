import type { z } from "zod";
import type { ReplacementInput } from "../../shared/schemas/stock";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { execute } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { ProtectorIssue } from "../models/issue";

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
  await execute(
    `INSERT INTO stock_moves (organization_id, site_id, model_id, size, part, kind, quantity, issue_id, moved_on, author_id)
     VALUES ($1, $2, $3, $4, $5, 'changed', -1, $6, $7, $8)`,
    [
      actor.organizationId,
      found.siteId,
      found.modelId,
      found.size,
      part,
      found.id,
      changedOn,
      actor.userId,
    ],
  );
  await recordAudit(actor, {
    action: "change-cushions",
    subjectKind: "protector-issue",
    subjectId: found.id,
    values: { part, changedOn },
  });
}
