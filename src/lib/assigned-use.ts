/** Wherever there is noise, and no task or area of its own. */
export const EVERYWHERE = "everywhere";

/** What an assignment is for, as a choice of a form: "everywhere", "task <id>" or "area <id>". */
export const assignedUse = ({
  taskId,
  areaId,
}: {
  readonly taskId: string | null;
  readonly areaId: string | null;
}): string => (taskId ? `task ${taskId}` : areaId ? `area ${areaId}` : EVERYWHERE);
