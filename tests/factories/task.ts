import { insert, next } from "./insert";
import { buildSite, type Site } from "./site";

export interface Task {
  id: string;
  organizationId: string;
  siteId: string;
  name: string;
}

interface TaskOverrides {
  site?: Site;
  name?: string;
  areaId?: string;
  /** Null: a task whose noise nobody has told yet. */
  levelDb?: number | null;
  metric?: object;
  peakDb?: number;
  peakWeighting?: string;
  /** Unweighted, by `OCTAVE_BANDS_HZ`. */
  octaveBandsDb?: (number | null)[];
  effectiveFrom?: string;
}

/** A task with its first level. */
export async function buildTask(overrides: TaskOverrides = {}): Promise<Task> {
  const site = overrides.site ?? (await buildSite());
  const { organizationId, id: siteId } = site;
  const name = overrides.name ?? `Task ${next()}`;
  const id = await insert("tasks", { organizationId, siteId, name, areaId: overrides.areaId });
  const { levelDb = 88, metric = { kind: "laeq" }, effectiveFrom = "2020-01-01" } = overrides;
  if (levelDb !== null) {
    const { peakDb, peakWeighting, octaveBandsDb } = overrides;
    const level = {
      metric: JSON.stringify(metric),
      levelDb,
      grade: "task-level",
      effectiveFrom,
      peakDb,
      peakWeighting,
      octaveBandsDb,
    };
    await insert("task_levels", { organizationId, taskId: id, number: 1, ...level });
  }
  return { id, organizationId, siteId, name };
}

export interface Job {
  id: string;
  organizationId: string;
  siteId: string;
  name: string;
}

interface JobOverrides {
  site?: Site;
  name?: string;
  tasks?: { taskId: string; durationMin: number }[];
}

/** A job whose nominal day is one task of its site, unless told otherwise. */
export async function buildJob(overrides: JobOverrides = {}): Promise<Job> {
  const site = overrides.site ?? (await buildSite());
  const { organizationId, id: siteId } = site;
  const name = overrides.name ?? `Job ${next()}`;
  const id = await insert("jobs", { organizationId, siteId, name });
  const tasks = overrides.tasks ?? [{ taskId: (await buildTask({ site })).id, durationMin: 480 }];
  for (const [position, { taskId, durationMin }] of tasks.entries()) {
    await insert("job_tasks", { organizationId, jobId: id, taskId, position, durationMin });
  }
  return { id, organizationId, siteId, name };
}
