import type { WorkerInput } from "../../shared/schemas/worker";
import { dateIssues } from "../lib/calendar";
import { issue, unprocessable } from "../lib/errors";
import { type Actor, findVisible } from "../lib/policy";
import { Job } from "../models/task";
import { programmePolicy } from "../policies";

/** @throws AppError not-found or invalid: a job of another site, dates nobody means, a reason for no requirement. */
export async function checkWorker(actor: Actor, input: WorkerInput): Promise<void> {
  const { hiredOn, leftOn, jobId, siteId } = input;
  const issues = [...dateIssues(["hiredOn"], hiredOn), ...dateIssues(["leftOn"], leftOn)];
  const hasRequirement = input.mustWear || input.personalTargetDb !== null;
  if (input.requirementReason && !hasRequirement)
    issues.push(issue(["requirementReason"], "reason-without-requirement"));
  if (jobId !== null) {
    const job = await findVisible(Job, programmePolicy, jobId, actor);
    if (job.siteId !== siteId) issues.push(issue(["jobId"], "job-of-other-site"));
  }
  if (issues.length > 0) throw unprocessable(issues);
}
