import type { ProblemIssue } from "../../shared/schemas/problem";
import { addDays, localDate } from "../../shared/time/zone";
import { issue, unprocessable } from "../lib/errors";

/** A phone's clock may be this far ahead of the server's. */
const CLOCK_SLACK_MS = 5 * 60_000;
const DAY_MIN = 1440;

/**
 * Holds the instants of a run to its date and to the clock: none lies ahead, the run starts on its date or beside it (a
 * shift that began before midnight), and lasts a day at most.
 *
 * @throws AppError invalid
 */
export function checkInstants(
  { timeZone }: { timeZone: string },
  {
    date,
    from,
    fromField,
    to = null,
  }: { date: string; from: string; fromField: string; to?: string | null },
): void {
  const latest = Date.now() + CLOCK_SLACK_MS;
  const issues: ProblemIssue[] = [];
  const startedOn = localDate(new Date(from), timeZone);
  if (Date.parse(from) > latest) issues.push(issue([fromField], "in-the-future"));
  else if (startedOn < addDays(date, -1) || startedOn > addDays(date, 1))
    issues.push(issue([fromField], "not-on-that-day", { date }));
  if (to !== null) {
    const lengthMin = (Date.parse(to) - Date.parse(from)) / 60_000;
    if (Date.parse(to) > latest) issues.push(issue(["backAt"], "in-the-future"));
    else if (lengthMin <= 0) issues.push(issue(["backAt"], "ends-before-start"));
    else if (lengthMin > DAY_MIN) issues.push(issue(["backAt"], "longer-than-a-day"));
  }
  if (issues.length > 0) throw unprocessable(issues);
}
