import type { AssignmentView, WorkerView } from "../../../shared/schemas/worker";
import type { OwnDay } from "./queries";

export type OwnProtector = Pick<
  AssignmentView,
  | "id"
  | "use"
  | "useName"
  | "innerModelId"
  | "innerName"
  | "outerName"
  | "size"
  | "fromDate"
  | "toDate"
>;

const isInForce = ({ fromDate, toDate }: OwnProtector, date: string) =>
  fromDate <= date && (toDate === null || date <= toDate);

/** The protector that decided the day's word: one for the task itself before one for everywhere. */
export function protectorOfDay(
  assignments: readonly OwnProtector[],
  day: Pick<OwnDay, "date" | "decidingTaskName">,
): OwnProtector | null {
  const then = assignments.filter((one) => isInForce(one, day.date));
  return (
    then.find(({ use, useName }) => use === "task" && useName === day.decidingTaskName) ??
    then.find(({ use }) => use === "area") ??
    then.find(({ use }) => use === "everywhere") ??
    null
  );
}

/** What this worker wears now, the one that matters most first. */
export function protectorsToday(
  { assignments }: Pick<WorkerView, "assignments">,
  today: string,
  lastDay: OwnDay | null,
): OwnProtector[] {
  const now = assignments.filter((one) => isInForce(one, today));
  const main = lastDay ? protectorOfDay(now, { ...lastDay, date: today }) : null;
  const rank = (one: OwnProtector) => (one === main ? 0 : one.use === "everywhere" ? 1 : 2);
  return [...now].sort((a, b) => rank(a) - rank(b));
}
