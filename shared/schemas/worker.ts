import { z } from "zod";
import { Can, EmployeeNumber, IsoDate, Language, Name, PageQuery, pageOf } from "./common";
import { DayFigures } from "./finding";
import { Gear, GearSet, Size } from "./fit";

export const WorkerInput = z
  .object({
    siteId: z.uuid(),
    jobId: z.uuid().nullable().default(null),
    employeeNumber: EmployeeNumber,
    name: Name(200),
    employer: z.enum(["own", "agency", "contractor"]).default("own"),
    employerName: z.string().trim().max(200).nullable().default(null),
    language: Language.default("en"),
    hiredOn: IsoDate,
    leftOn: IsoDate.nullable().default(null),
    mustWear: z.boolean().default(false),
    personalTargetDb: z.number().min(60).max(100).nullable().default(null),
    /** Worn beside a protector in every task. */
    wornGear: GearSet,
    /** Only officers send and see it. */
    requirementReason: z.string().trim().max(2000).nullable().default(null),
  })
  .check((context) => {
    const { hiredOn, leftOn } = context.value;
    if (leftOn !== null && leftOn < hiredOn)
      context.issues.push({
        code: "custom",
        input: leftOn,
        path: ["leftOn"],
        params: { code: "left-before-hired", hiredOn },
      });
  });
export type WorkerInput = z.infer<typeof WorkerInput>;

export const WorkerRow = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  siteName: z.string(),
  employeeNumber: z.string(),
  name: z.string(),
  employer: z.enum(["own", "agency", "contractor"]),
  employerName: z.string().nullable(),
  jobName: z.string().nullable(),
  crewName: z.string().nullable(),
  leftOn: IsoDate.nullable(),
  lastDay: DayFigures.nullable(),
  openFindings: z.number(),
});
export type WorkerRow = z.infer<typeof WorkerRow>;
export const WorkerPage = pageOf(WorkerRow);
export const WorkerFilter = PageQuery.extend({
  search: z.string().trim().max(100).optional(),
  siteId: z.uuid().optional(),
  crewId: z.uuid().optional(),
  includeLeft: z.enum(["true", "false"]).default("false"),
});

export const AssignmentView = z.object({
  id: z.uuid(),
  workerId: z.uuid(),
  use: z.enum(["everywhere", "task", "area"]),
  taskId: z.uuid().nullable(),
  areaId: z.uuid().nullable(),
  useName: z.string().nullable(),
  innerModelId: z.uuid(),
  innerName: z.string(),
  outerModelId: z.uuid().nullable(),
  outerName: z.string().nullable(),
  size: z.string().nullable(),
  audioDb: z.number().nullable(),
  fromDate: IsoDate,
  toDate: IsoDate.nullable(),
  revision: z.number(),
});
export type AssignmentView = z.infer<typeof AssignmentView>;
export const AssignmentList = z.object({ rows: z.array(AssignmentView) });

/** Level of a radio or signal under the cup while it is worn, dB(A). */
export const AudioDb = z.number().min(20).max(120);

export const AssignmentInput = z
  .object({
    taskId: z.uuid().nullable().default(null),
    areaId: z.uuid().nullable().default(null),
    innerModelId: z.uuid(),
    outerModelId: z.uuid().nullable().default(null),
    fromDate: IsoDate,
    toDate: IsoDate.nullable().default(null),
    /** Of the one next to the ear. Null: it comes in one, or nobody has said. */
    size: Size.nullable().default(null),
    audioDb: AudioDb.nullable().default(null),
  })
  .check((context) => {
    const { taskId, areaId, innerModelId, outerModelId, fromDate, toDate } = context.value;
    if (taskId && areaId)
      context.issues.push({
        code: "custom",
        input: areaId,
        path: ["areaId"],
        params: { code: "one-use-only" },
      });
    if (innerModelId === outerModelId)
      context.issues.push({
        code: "custom",
        input: outerModelId,
        path: ["outerModelId"],
        params: { code: "same-protector-twice" },
      });
    if (toDate !== null && toDate < fromDate)
      context.issues.push({
        code: "custom",
        input: toDate,
        path: ["toDate"],
        params: { code: "ends-before-start" },
      });
  });
export type AssignmentInput = z.infer<typeof AssignmentInput>;
/** The same assignment for many workers at once: all of them or none. */
export const ManyAssignmentsInput = z
  .object({ workerIds: z.array(z.uuid()).min(1).max(200), assignment: AssignmentInput })
  .check((context) => {
    const { workerIds } = context.value;
    workerIds.forEach((workerId, index) => {
      if (workerIds.indexOf(workerId) < index)
        context.issues.push({
          code: "custom",
          input: workerId,
          path: ["workerIds", index],
          params: { code: "worker-twice" },
        });
    });
  });
export type ManyAssignmentsInput = z.infer<typeof ManyAssignmentsInput>;
/** What was assigned, and who is left as they were: they have the same for this use already. */
export const ManyAssigned = AssignmentList.extend({ alreadyHad: z.array(z.uuid()) });
export const AssignmentEnd = z.object({ toDate: IsoDate });

export const WorkerView = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  siteName: z.string(),
  jobId: z.uuid().nullable(),
  jobName: z.string().nullable(),
  employeeNumber: z.string(),
  name: z.string(),
  employer: z.enum(["own", "agency", "contractor"]),
  employerName: z.string().nullable(),
  language: Language,
  hiredOn: IsoDate,
  leftOn: IsoDate.nullable(),
  mustWear: z.boolean(),
  personalTargetDb: z.number().nullable(),
  wornGear: z.array(Gear),
  /** Null unless the reader is an officer. */
  requirementReason: z.string().nullable(),
  crews: z.array(
    z.object({
      id: z.uuid(),
      name: z.string(),
      fromDate: IsoDate,
      toDate: IsoDate.nullable(),
      isLoan: z.boolean(),
    }),
  ),
  assignments: z.array(AssignmentView),
  hasSignIn: z.boolean(),
  revision: z.number(),
  can: Can("change", "assign", "issueCode", "report"),
});
export type WorkerView = z.infer<typeof WorkerView>;

export const HistoryFilter = PageQuery.extend({
  from: IsoDate.optional(),
  to: IsoDate.optional(),
  limit: z.coerce.number().int().min(1).max(400).default(60),
});
export const HistoryPage = pageOf(
  DayFigures.extend({
    shiftMin: z.number(),
    isStale: z.boolean(),
    /** When the day's last shift is over; null where no hours are known, as of an imported day. */
    endsAt: z.iso.datetime().nullable(),
    /** The governing rules' main limit, so that a worker's page draws it without the rule sets; null where they are not known. */
    limit: z.object({ levelDb: z.number(), isAtEar: z.boolean() }).nullable(),
    /** Kinds of the governing criteria that the day is over. */
    kindsOver: z.array(z.enum(["limit", "action", "ceiling", "peak", "dual-protection"])),
    /** To the worker, of the latest day: each assignment that was worn, with its word in its own use. */
    wordsByUse: z.array(
      z.object({
        assignmentId: z.uuid(),
        word: DayFigures.shape.word,
      }),
    ),
  }),
);
export const SignInCodeView = z.object({ code: z.string(), expiresAt: z.string() });

/** Workers by name and number only, for whoever links sign-ins to them. */
export const WorkerName = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  name: z.string(),
  employeeNumber: z.string(),
  hasSignIn: z.boolean(),
  leftOn: IsoDate.nullable(),
});
export type WorkerName = z.infer<typeof WorkerName>;
export const WorkerNameFilter = z.object({
  search: z.string().trim().min(1).max(100),
  siteId: z.uuid().optional(),
  /** `all`: also those who left, after those who are there. */
  who: z.enum(["present", "all"]).default("present"),
});
export const WorkerNameList = z.object({ rows: z.array(WorkerName) });
