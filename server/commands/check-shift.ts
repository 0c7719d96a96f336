import type { z } from "zod";
import type { ProblemIssue } from "../../shared/schemas/problem";
import type { ShiftFacts, ShiftTaskInput } from "../../shared/schemas/shift";
import { atLocalTime, localDate, localTime } from "../../shared/time/zone";
import { todayAt } from "../lib/calendar";
import { rows } from "../lib/db";
import { issue } from "../lib/errors";
import type { SavedShiftRow } from "../queries/saved-shifts";

/** What holds for a shift however it comes in: typed into a day, corrected, or imported. */

interface Employment {
  hiredOn: string;
  leftOn: string | null;
}

export function employmentIssues(date: string, { hiredOn, leftOn }: Employment): ProblemIssue[] {
  if (date < hiredOn) return [issue(["date"], "before-hire", { hiredOn })];
  if (leftOn !== null && date > leftOn) return [issue(["date"], "after-leaving", { leftOn })];
  return [];
}

/** Shifts may be entered for a day that has begun in the site's zone. */
export const futureIssues = (date: string, today: string): ProblemIssue[] =>
  date > today ? [issue(["date"], "in-the-future", { today })] : [];

/** Exactly 24 hours are asked about once. */
export const wholeDayIssues = (lengthMin: number, confirmsWholeDay: boolean): ProblemIssue[] =>
  lengthMin === 1440 && !confirmsWholeDay ? [issue(["lengthMin"], "whole-day-unconfirmed")] : [];

export const unknownTaskIssues = (
  tasks: readonly ShiftTaskInput[],
  known: ReadonlySet<string>,
): ProblemIssue[] =>
  tasks.flatMap(({ taskId }, position) =>
    known.has(taskId) ? [] : [issue(["tasks", position, "taskId"], "task-unknown")],
  );

/** The instant at which it starts; null, with an issue, where the clock never showed that time or showed it twice. */
export function startOf(
  date: string,
  one: { localStart: string; whichHour: "first" | "second" | null },
  timeZone: string,
  issues: ProblemIssue[],
): Date | null {
  const local = atLocalTime(date, one.localStart, timeZone);
  if (local.kind === "one") return local.instant;
  if (local.kind === "skipped") {
    issues.push(issue(["localStart"], "time-skipped", { localStart: one.localStart }));
    return null;
  }
  if (one.whichHour !== null) return local[one.whichHour];
  issues.push(issue(["whichHour"], "time-twice", { localStart: one.localStart }));
  return null;
}

interface Span {
  date: string;
  localStart: string;
  lengthMin: number;
  startsAt: Date;
}

const endOf = ({ startsAt, lengthMin }: Pick<Span, "startsAt" | "lengthMin">) =>
  startsAt.getTime() + lengthMin * 60_000;

/** A shift whose end lies ahead is a plan and no record yet: it is asked about once. */
export function openEndIssues(
  shift: Pick<Span, "startsAt" | "lengthMin">,
  timeZone: string,
  confirmsOpenEnd: boolean,
): ProblemIssue[] {
  const end = new Date(endOf(shift));
  // One of a later day is refused as a whole.
  const hasDayBegun = localDate(shift.startsAt, timeZone) <= todayAt(timeZone);
  return hasDayBegun && end.getTime() > Date.now() && !confirmsOpenEnd
    ? [issue(["lengthMin"], "open-end-unconfirmed", { time: localTime(end, timeZone) })]
    : [];
}

/** A worker can't be in two shifts at once. */
export function overlapIssues(
  shift: Pick<Span, "startsAt" | "lengthMin">,
  others: readonly Span[],
): ProblemIssue[] {
  const other = others.find(
    (one) => one.startsAt.getTime() < endOf(shift) && shift.startsAt.getTime() < endOf(one),
  );
  return other
    ? [
        issue(["localStart"], "shifts-overlap", {
          date: other.date,
          localStart: other.localStart,
          lengthMin: other.lengthMin,
        }),
      ]
    : [];
}

/** What comes in is what is stored already: a double click, a second tab or the same file again changes nothing. */
export function isSameShift(
  one: Omit<z.output<typeof ShiftFacts>, "whichHour">,
  saved: SavedShiftRow,
): boolean {
  const text = (tasks: readonly ShiftTaskInput[]) =>
    JSON.stringify(
      tasks.map((task) => [task.taskId, task.durationMin, task.wornPct, task.wornIsShiftWide]),
    );
  const quietDb = one.unaccounted.how === "quiet" ? one.unaccounted.levelDb : null;
  return (
    one.localStart === saved.localStart &&
    one.lengthMin === saved.lengthMin &&
    one.unaccounted.how === saved.how &&
    quietDb === saved.quietDb &&
    (one.note ?? "") === (saved.note ?? "") &&
    text(one.tasks) === text(saved.tasks)
  );
}

/** Two savings of one worker's days go one after the other. */
export async function lockWorkers(workerIds: readonly string[]): Promise<void> {
  if (workerIds.length > 0)
    await rows(
      "SELECT id FROM workers WHERE id = ANY (CAST(:ids AS uuid[])) ORDER BY id FOR NO KEY UPDATE",
      { ids: `{${workerIds.join(",")}}` },
    );
}
