import type { WorkplaceChangeInput } from "../../shared/schemas/workplace-change";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { WorkplaceChange } from "../models/survey";

/** A change to process, machine, control or pattern of work, entered once it has happened. */
export async function recordWorkplaceChange(
  actor: Actor,
  site: { id: string; timeZone: string },
  subject: { siteId: string; field: "areaId" | "taskId" | "jobId" },
  input: WorkplaceChangeInput,
): Promise<WorkplaceChange> {
  const today = todayAt(site.timeZone);
  const issues = dateIssues(["happenedOn"], input.happenedOn);
  if (input.happenedOn > today) issues.push(issue(["happenedOn"], "in-the-future", { today }));
  if (subject.siteId !== site.id)
    issues.push(
      issue(
        [subject.field],
        `${subject.field.slice(0, -2) as "area" | "task" | "job"}-of-other-site`,
      ),
    );
  if (issues.length > 0) throw unprocessable(issues);
  const change = await WorkplaceChange.create({
    organizationId: actor.organizationId,
    authorId: actor.userId,
    ...input,
  });
  await recordAudit(actor, {
    action: "record-workplace-change",
    subjectKind: "workplace-change",
    subjectId: change.id,
    values: { ...input },
  });
  return change;
}
