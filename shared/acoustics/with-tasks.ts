import type { DayInput, TimedTask } from "./types";

/** The day with each of its tasks changed; nothing else of it is. */
export const withTasks = (day: DayInput, change: (task: TimedTask) => TimedTask): DayInput => ({
  ...day,
  shifts: day.shifts.map((shift) => ({ ...shift, tasks: shift.tasks.map(change) })),
});
