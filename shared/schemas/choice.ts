import { z } from "zod";
import { IsoDate, Language } from "./common";
import { DayFigures } from "./finding";
import { Candidate, Gear } from "./fit";
import { ChangePreview } from "./site";

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
  /** What is assigned until further notice for the task, its area, or everywhere: given anew it would change nothing. */
  holds: z.array(
    z.object({
      use: z.enum(["subject", "area", "everywhere"]),
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
  /** Models whose active part has passed its check on this worker. */
  checkedModelIds: z.array(z.uuid()),
});
export type Wearer = z.infer<typeof Wearer>;

export const ProtectorChoiceView = z.object({
  subject: z.object({
    kind: z.enum(["task", "job"]),
    id: z.uuid(),
    name: z.string(),
    siteId: z.uuid(),
    siteName: z.string(),
    /** Where a task is done; a job is done in many. */
    area: z.object({ id: z.uuid(), name: z.string() }).nullable(),
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
  /** The site credits an active part that was checked on its wearer: here, where it was on all of them. */
  creditsActivePart: z.boolean(),
  singles: z.array(Candidate),
  /** A plug under a muff; the ones that the rule can say something of. */
  pairs: z.array(Candidate),
  /** Who has this job, or this task in the job's day, by name. */
  wearers: z.array(Wearer),
  hasMoreWearers: z.boolean(),
});
export type ProtectorChoiceView = z.infer<typeof ProtectorChoiceView>;

/** What a usual day comes to, as far as a protector decides it. */
const UsualDay = DayFigures.pick({ verdictAtEar: true, word: true, atEarDb: true });

/** Who would change verdict if these workers were given a protector, before it is. */
export const GivingPreview = z.object({
  /** Whose nominal day changes verdict or word, the gravest first. */
  changes: z.array(
    z.object({ workerId: z.uuid(), workerName: z.string(), before: UsualDay, after: UsualDay }),
  ),
  /** How many usual days were looked at; and who has none, so that nothing can be said. */
  daysCount: z.number(),
  withoutDayCount: z.number(),
  /** Days on record from the first day on. */
  recorded: ChangePreview,
  /** Devices that would have to be handed out, beside what the workers' sites have of them. */
  stock: z.array(
    z.object({
      siteName: z.string(),
      modelId: z.uuid(),
      modelName: z.string(),
      /** Who does not have one in hand yet. */
      neededCount: z.number(),
      /** Of them, who has it assigned already: from elsewhere, or before issues were kept here. */
      assignedCount: z.number(),
      /** Null: nothing of it was ever entered there. */
      stockCount: z.number().nullable(),
    }),
  ),
});
export type GivingPreview = z.infer<typeof GivingPreview>;

export const SlipsQuery = z.object({
  /** Ids with commas between them. */
  workerIds: z
    .string()
    .transform((text) => text.split(",").filter(Boolean))
    .pipe(z.array(z.uuid()).min(1).max(60)),
});

/** Without a language: each worker's own. */
export const SlipsPdfQuery = SlipsQuery.extend({ language: Language.optional() });

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
      outerKind: z.string().nullable(),
      useName: z.string().nullable(),
      /** The task that decides its word, where the rule judges the shift the loudest; null: none of its use is in noise. */
      taskName: z.string().nullable(),
      outsideDb: z.number().nullable(),
      wornDb: z.number().nullable(),
      word: z
        .enum(["too-little", "just-enough", "good", "strong-side", "too-much", "enough"])
        .nullable(),
      fit: z
        .object({
          testedOn: IsoDate,
          hasPassed: z.boolean().nullable(),
          /** Nothing had to come off: then it neither passed nor failed, whatever was stored. */
          needDb: z.number().nullable(),
        })
        .nullable(),
      /** When it was handed out, of two worn together the later; null: assigned, and not handed out yet. */
      issuedOn: IsoDate.nullable(),
      /** Of two worn together the earlier. */
      cushionsDueOn: IsoDate.nullable(),
      tipsDueOn: IsoDate.nullable(),
      /** Of two worn together the shorter. */
      batteryMin: z.number().nullable(),
    }),
  ),
});
export type IssueSlip = z.infer<typeof IssueSlip>;
export const IssueSlips = z.object({ rows: z.array(IssueSlip) });
