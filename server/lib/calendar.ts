import type { ProblemIssue } from "../../shared/schemas/problem";
import { addDays, localDate } from "../../shared/time/zone";
import { issue } from "./errors";

/** The date that a site's clock shows now. */
export const todayAt = (timeZone: string): string => localDate(new Date(), timeZone);

const earliest = "1950-01-01";

/** What is wrong with a date that a person typed: before living memory, or further ahead than anybody plans. */
export function dateIssues(
  path: ProblemIssue["path"],
  date: string | null,
  aheadDays = 366,
): ProblemIssue[] {
  if (date === null) return [];
  const latest = addDays(todayAt("UTC"), aheadDays);
  if (date < earliest) return [issue(path, "date-too-early", { earliest })];
  return date > latest ? [issue(path, "date-too-far-ahead", { latest })] : [];
}
