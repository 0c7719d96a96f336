import { z } from "zod";
import { Can, IsoDate, Name, Reason } from "./common";
import { TaskLevelFacts } from "./evaluation";
import { GearSet } from "./fit";
import { LEVEL_DOUBTS } from "./level-doubts";

const DatedLevel = TaskLevelFacts.extend({
  effectiveFrom: IsoDate,
  sourceNote: z.string().trim().max(2000).default(""),
  /** Needed for every level after the first. */
  reason: Reason.nullable().default(null),
});

export const TaskLevelInput = DatedLevel.extend({
  /** The level is right although its bands, or its samples, say another. */
  acceptedDoubts: z.array(z.enum(LEVEL_DOUBTS)).default([]),
});
export type TaskLevelInput = z.infer<typeof TaskLevelInput>;

export const TaskLevelView = DatedLevel.extend({
  id: z.uuid(),
  number: z.number(),
  /** The survey that it rests on, with each sample's own run. */
  surveyId: z.uuid().nullable(),
  surveyName: z.string().nullable(),
  /** The recording that it, or its spectrum, comes from. */
  recordingId: z.uuid().nullable(),
  recordingName: z.string().nullable(),
  strategy: z.enum(["task", "job", "full-day"]),
  keptReasons: z.array(z.string()),
  /** The earlier level whose spectrum it keeps, shifted. */
  spectrumOfNumber: z.number().nullable(),
  samples: z.array(
    z.object({
      runId: z.uuid(),
      date: IsoDate,
      levelDb: z.number(),
      fromS: z.number().nullable(),
      toS: z.number().nullable(),
    }),
  ),
  authorName: z.string().nullable(),
  createdAt: z.string(),
});

export const TaskInput = z.object({
  siteId: z.uuid(),
  areaId: z.uuid().nullable().default(null),
  name: Name(120),
  /** What the task asks for beside a protector. */
  requiredGear: GearSet,
  isArchived: z.boolean().default(false),
});
export type TaskInput = z.infer<typeof TaskInput>;
export const NewTaskInput = TaskInput.extend({ level: TaskLevelInput.nullable().default(null) });

export const TaskView = TaskInput.extend({
  id: z.uuid(),
  areaName: z.string().nullable(),
  zone: z.enum(["none", "single", "double"]),
  revision: z.number(),
  /** In force today. */
  level: TaskLevelView.nullable(),
  can: Can("change"),
});
export type TaskView = z.infer<typeof TaskView>;
export const TaskDetail = TaskView.extend({
  levels: z.array(TaskLevelView),
  shiftsCount: z.number(),
});
export const TaskList = z.object({ rows: z.array(TaskView) });

export const JobInput = z.object({
  siteId: z.uuid(),
  name: Name(120),
  isArchived: z.boolean().default(false),
  tasks: z
    .array(z.object({ taskId: z.uuid(), durationMin: z.number().positive().max(1440) }))
    .max(24),
});
export type JobInput = z.infer<typeof JobInput>;
export const JobView = JobInput.extend({
  id: z.uuid(),
  revision: z.number(),
  workersCount: z.number(),
  can: Can("change"),
});
export const JobList = z.object({ rows: z.array(JobView) });
