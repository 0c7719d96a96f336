import type { ProblemIssue } from "../../shared/schemas/problem";
import { dateIssues } from "./calendar";
import { issue, unprocessable } from "./errors";

/** SQL: the half-open range of days whose last one is given, or none. */
export const daysFromTo = (from: string, to: string) => `daterange(${from}::date, ${to}::date + 1)`;

/** What is wrong with a span of days, the last one included. */
export function spanIssues(fromDate: string, toDate: string | null): ProblemIssue[] {
  const issues = [...dateIssues(["fromDate"], fromDate), ...dateIssues(["toDate"], toDate, 3660)];
  if (toDate !== null && toDate < fromDate)
    issues.push(issue(["toDate"], "ends-before-start", { fromDate }));
  return issues;
}

/** @throws AppError invalid */
export function checkSpan(fromDate: string, toDate: string | null): void {
  const issues = spanIssues(fromDate, toDate);
  if (issues.length > 0) throw unprocessable(issues);
}
