import type {
  BandAttenuation,
  DayInput,
  Protection,
  ProtectorData,
  ReadingInput,
  TaskLevel,
  TimedTask,
  Unaccounted,
  Zone,
} from "../acoustics/types";

/** A task as day entry knows it. */
export interface KnownTask {
  id: string;
  name: string;
  areaId: string | null;
  zone: Zone;
  level: TaskLevel | null;
}

export interface KnownAssignment {
  id: string;
  taskId: string | null;
  areaId: string | null;
  innerModelId: string;
  outerModelId: string | null;
  /** What is known of it on this worker. */
  ownFitDb: number | null;
  activeCheckPassed: boolean;
  combinationBands: BandAttenuation | null;
  audioDb: number | null;
}

export interface EnteredTask {
  taskId: string;
  durationMin: number;
  wornPct: number | null;
  wornIsShiftWide: boolean;
}

export interface EnteredShift {
  id: string;
  lengthMin: number;
  tasks: readonly EnteredTask[];
  unaccounted: Unaccounted;
  readings: readonly ReadingInput[];
}

export interface DayContext {
  tasks: ReadonlyMap<string, KnownTask>;
  models: ReadonlyMap<string, ProtectorData>;
  site: DayInput["site"];
}

/** The assignment that holds in a task: one for the task itself before one for its area before one for everywhere. */
export function assignmentFor(
  task: Pick<KnownTask, "id" | "areaId">,
  assignments: readonly KnownAssignment[],
): KnownAssignment | null {
  return (
    assignments.find(({ taskId }) => taskId === task.id) ??
    assignments.find(({ areaId }) => areaId !== null && areaId === task.areaId) ??
    assignments.find(({ taskId, areaId }) => taskId === null && areaId === null) ??
    null
  );
}

function protectionOf(
  assignment: KnownAssignment | null,
  models: DayContext["models"],
): Protection | null {
  const inner = assignment && models.get(assignment.innerModelId);
  if (!assignment || !inner) return null;
  const outer =
    assignment.outerModelId === null ? null : (models.get(assignment.outerModelId) ?? null);
  return {
    assignmentId: assignment.id,
    inner,
    outer,
    combinationBands: assignment.combinationBands,
    ownFitDb: assignment.ownFitDb,
    activeCheckPassed: assignment.activeCheckPassed,
    audioDb: assignment.audioDb,
  };
}

/** A day that is not stored yet, as the engine takes it: for the preview while typing and for what is expected. */
export function buildDayInput(
  worker: { id: string; mustWear: boolean; personalTargetDb: number | null },
  date: string,
  shifts: readonly EnteredShift[],
  assignments: readonly KnownAssignment[],
  { tasks, models, site }: DayContext,
): DayInput {
  return {
    workerId: worker.id,
    date,
    site,
    mustWear: worker.mustWear,
    personalTargetDb: worker.personalTargetDb,
    shifts: shifts.map(({ id, lengthMin, tasks: entered, unaccounted, readings }) => ({
      id,
      revisionId: null,
      lengthMin,
      unaccounted,
      readings,
      tasks: entered.flatMap((entry): TimedTask[] => {
        const task = tasks.get(entry.taskId);
        if (!task) return [];
        return [
          {
            id: `${id}:${task.id}`,
            taskId: task.id,
            name: task.name,
            durationMin: entry.durationMin,
            level: task.level,
            zone: task.zone,
            protection: protectionOf(assignmentFor(task, assignments), models),
            wornPct: entry.wornPct,
            wornIsShiftWide: entry.wornIsShiftWide,
          },
        ];
      }),
    })),
  };
}
