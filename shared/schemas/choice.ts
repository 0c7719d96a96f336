import { z } from "zod";
import { IsoDate } from "./common";
import { Candidate, Gear } from "./fit";

/** For which noise protectors are compared: a task's, or the nominal day of a job. */
export const ChoiceQuery = z
  .object({ taskId: z.uuid().optional(), jobId: z.uuid().optional() })
  .check((context) => {
    const { taskId, jobId } = context.value;
    if ((taskId === undefined) === (jobId === undefined))
      context.issues.push({
        code: "custom",
        input: jobId,
        path: ["taskId"],
        params: { code: "task-or-job" },
      });
  });
export type ChoiceQuery = z.infer<typeof ChoiceQuery>;

/** Somebody who would wear it. */
export const Wearer = z.object({
  id: z.uuid(),
  name: z.string(),
  employeeNumber: z.string(),
  crewName: z.string().nullable(),
  wornGear: z.array(Gear),
  hiredOn: IsoDate,
  /** What is assigned for this use today. */
  currentName: z.string().nullable(),
  /** What is assigned until further notice for the task, or everywhere: given anew it would change nothing. */
  holds: z.array(
    z.object({
      use: z.enum(["subject", "everywhere"]),
      modelId: z.uuid(),
      outerModelId: z.uuid().nullable(),
      fromDate: IsoDate,
    }),
  ),
  /** The latest fit by model. */
  fits: z.array(
    z.object({
      modelId: z.uuid(),
      parDb: z.number(),
      hasPassed: z.boolean().nullable(),
      needDb: z.number().nullable(),
    }),
  ),
});
export type Wearer = z.infer<typeof Wearer>;

export const ProtectorChoiceView = z.object({
  subject: z.object({
    kind: z.enum(["task", "job"]),
    id: z.uuid(),
    name: z.string(),
    siteId: z.uuid(),
    siteName: z.string(),
  }),
  date: IsoDate,
  ruleSetKey: z.string(),
  ruleSetVersion: z.number(),
  targetDb: z.number().nullable(),
  /** The noise that was compared; without any, nothing can be. */
  noises: z.array(
    z.object({
      taskId: z.uuid(),
      taskName: z.string(),
      levelDb: z.number(),
      durationMin: z.number(),
      hasSpectrum: z.boolean(),
    }),
  ),
  /** Eight hours stand for a task that is in no job's nominal day. */
  isDurationAssumed: z.boolean(),
  requiredGear: z.array(Gear),
  singles: z.array(Candidate),
  /** A plug under a muff; the ones that the rule can say something of. */
  pairs: z.array(Candidate),
  /** Who has this job, or this task in the job's day, by name. */
  wearers: z.array(Wearer),
  hasMoreWearers: z.boolean(),
});
export type ProtectorChoiceView = z.infer<typeof ProtectorChoiceView>;

export const SlipsQuery = z.object({
  /** Ids with commas between them. */
  workerIds: z
    .string()
    .transform((text) => text.split(",").filter(Boolean))
    .pipe(z.array(z.uuid()).min(1).max(60)),
});

/** What a worker gets with the protectors: each with where it is worn, and the level under it. */
export const IssueSlip = z.object({
  worker: z.object({
    id: z.uuid(),
    name: z.string(),
    employeeNumber: z.string(),
    crewName: z.string().nullable(),
    siteId: z.uuid(),
    siteName: z.string(),
    language: z.string(),
  }),
  date: IsoDate,
  ruleSetKey: z.string(),
  ruleSetVersion: z.number(),
  actionDb: z.number().nullable(),
  protectors: z.array(
    z.object({
      assignmentId: z.uuid(),
      name: z.string(),
      outerName: z.string().nullable(),
      size: z.string().nullable(),
      kind: z.string(),
      useName: z.string().nullable(),
      /** The task that decides its word; null: none of its use is in noise. */
      taskName: z.string().nullable(),
      outsideDb: z.number().nullable(),
      wornDb: z.number().nullable(),
      word: z
        .enum(["too-little", "just-enough", "good", "strong-side", "too-much", "enough"])
        .nullable(),
      fit: z.object({ testedOn: IsoDate, hasPassed: z.boolean().nullable() }).nullable(),
      /** When it was handed out, of two worn together the later; null: assigned, and not handed out yet. */
      issuedOn: IsoDate.nullable(),
      cushionsDueOn: IsoDate.nullable(),
      tipsDueOn: IsoDate.nullable(),
      batteryMin: z.number().nullable(),
    }),
  ),
});
export type IssueSlip = z.infer<typeof IssueSlip>;
export const IssueSlips = z.object({ rows: z.array(IssueSlip) });
