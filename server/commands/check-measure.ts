import type { MeasureInput } from "../../shared/schemas/follow-up";
import { dateIssues, todayAt } from "../lib/calendar";
import { row } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Finding } from "../models/finding";
import { listOwners } from "../queries/follow-up";

/** @throws AppError 422 where a date can't be one, or the owner has no part in the site's findings. */
export async function checkMeasure(finding: Finding, input: MeasureInput): Promise<void> {
  const site = await row<{ timeZone: string }>(
    `SELECT time_zone AS "timeZone" FROM sites WHERE id = :id`,
    { id: finding.siteId },
  );
  const today = todayAt(site?.timeZone ?? "UTC");
  const issues = [
    ...dateIssues(["plannedOn"], input.plannedOn, 3660),
    ...dateIssues(["doneOn"], input.doneOn),
  ];
  if (input.doneOn !== null && input.doneOn > today)
    issues.push(issue(["doneOn"], "in-the-future", { today }));
  if (
    input.ownerId !== null &&
    !(await listOwners(finding.siteId)).some(({ id }) => id === input.ownerId)
  )
    issues.push(issue(["ownerId"], "not-of-this-site"));
  if (issues.length > 0) throw unprocessable(issues);
}
