import type { DayEvaluation, TaskAtEar } from "./types";

/**
 * The level at the ear while worn in the task that decides the protector's word, dB(A), as it counts. Where only bounds of
 * it are known, the one on the day's own side, if that is not open.
 */
export function whileWorn({
  tasks,
  decidingTaskId,
  counted,
  atEarBound,
}: Pick<DayEvaluation, "tasks" | "decidingTaskId" | "counted" | "atEarBound">): {
  readonly levelDb: number | null;
  readonly bound: DayEvaluation["atEarBound"];
} {
  if (counted) return { levelDb: counted.whileWornDb, bound: "exact" };
  const deciding = tasks.find(({ timedTaskId }) => timedTaskId === decidingTaskId);
  const range = deciding?.wornRangeDb;
  if (!range) return { levelDb: deciding?.wornDb ?? null, bound: "exact" };
  return rangeWhileWorn(range, atEarBound);
}

/** The end of what is possible while worn that stands for a task, dB: the one on which the day at the ear rests. */
export function rangeWhileWorn(
  { leastDb, mostDb }: NonNullable<TaskAtEar["wornRangeDb"]>,
  atEarBound: DayEvaluation["atEarBound"],
): { readonly levelDb: number | null; readonly bound: "upper" | "lower" } {
  return mostDb === null || (atEarBound === "lower" && leastDb !== null)
    ? { levelDb: leastDb, bound: "lower" }
    : { levelDb: mostDb, bound: "upper" };
}
