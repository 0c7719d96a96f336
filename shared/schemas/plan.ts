import { z } from "zod";
import type {
  BandAttenuation,
  OctaveBandValues,
  ProtectorData,
  TaskLevel,
} from "../acoustics/types";
import type { KnownAssignment } from "../day/build-day-input";
import { Can, IsoDate, Name, PageQuery, pageOf, Reason } from "./common";
import { Control } from "./follow-up";
import { KeptTimetable } from "./timetable";
import { PlanOutcome, Verdict } from "./tried";

export const PlanScope = z.object({
  scopeKind: z.enum(["worker", "job", "area", "crew"]),
  scopeId: z.uuid(),
});
export type PlanScope = z.infer<typeof PlanScope>;

const ReductionDb = z.number().min(-20).max(60);
const Bands = z.custom<OctaveBandValues>(
  (value) =>
    Array.isArray(value) &&
    value.length === 8 &&
    value.every((band) => typeof band === "number" && band >= -20 && band <= 60),
);

/** One thing done otherwise. Whatever a task gains in time another loses, and the other way round. */
export const PlanChange = z.discriminatedUnion("kind", [
  z
    .object({
      kind: z.literal("noise"),
      taskId: z.uuid(),
      byDb: ReductionDb.nullable(),
      bandsDb: Bands.nullable(),
    })
    .check((context) => {
      const { byDb, bandsDb } = context.value;
      if ((byDb === null) === (bandsDb === null))
        context.issues.push({
          code: "custom",
          input: byDb,
          path: ["byDb"],
          params: { code: "flat-or-bands" },
        });
    }),
  z.object({
    kind: z.literal("duration"),
    taskId: z.uuid(),
    durationMin: z.number().min(0).max(1440),
    otherTaskId: z.uuid(),
  }),
  z.object({
    kind: z.literal("rotation"),
    taskId: z.uuid(),
    workerId: z.uuid(),
    otherWorkerId: z.uuid(),
    otherTaskId: z.uuid(),
    minutes: z.number().min(1).max(1440),
  }),
  z.object({
    kind: z.literal("protector"),
    taskId: z.uuid().nullable(),
    innerModelId: z.uuid(),
    outerModelId: z.uuid().nullable(),
    /** Null: everybody of the scope. */
    workerIds: z.array(z.uuid()).min(1).max(200).nullable(),
  }),
  z.object({
    kind: z.literal("wearing"),
    taskId: z.uuid().nullable(),
    wornPct: z.number().min(0).max(100),
  }),
]);
export type PlanChange = z.infer<typeof PlanChange>;

export const PlanInput = PlanScope.extend({
  name: Name(200),
  goal: z.string().min(1).max(100),
  changes: z.array(PlanChange).min(1).max(30),
});
export type PlanInput = z.infer<typeof PlanInput>;

/** Under which of the five kinds of control a step comes, and the finding that it is to mend. */
const StepFinding = z.object({ findingId: z.uuid(), control: Control });

export const PlanStepInput = z.object({
  what: Reason,
  ownerId: z.uuid().nullable().default(null),
  dueOn: IsoDate,
  /** An open finding that gets it as its measure. */
  mends: StepFinding.nullable().default(null),
});
export type PlanStepInput = z.infer<typeof PlanStepInput>;

export const PlanStepChange = PlanStepInput.omit({ mends: true });
export type PlanStepChange = z.infer<typeof PlanStepChange>;

/** Marked done, or that it can't be, and why; or open again. */
export const PlanStepMark = z
  .object({
    state: z.enum(["open", "done", "cannot"]),
    reason: Reason.nullable().default(null),
  })
  .check((context) => {
    const { state, reason } = context.value;
    if (state === "cannot" && reason === null)
      context.issues.push({
        code: "custom",
        input: reason,
        path: ["reason"],
        params: { code: "required" },
      });
  });
export type PlanStepMark = z.infer<typeof PlanStepMark>;

export const PlanStepView = z.object({
  id: z.uuid(),
  what: z.string(),
  ownerId: z.uuid().nullable(),
  ownerName: z.string().nullable(),
  dueOn: IsoDate,
  state: z.enum(["open", "done", "cannot"]),
  markedOn: IsoDate.nullable(),
  reason: z.string().nullable(),
  mends: StepFinding.extend({ kind: z.string(), workerName: z.string().nullable() }).nullable(),
  revision: z.number(),
});
export type PlanStepView = z.infer<typeof PlanStepView>;

export const PlanPutAside = z.object({ reason: Reason });

const Scope = PlanScope.extend({ name: z.string(), siteId: z.uuid(), siteName: z.string() });

/** The nominal days that changes are tried on, with all that the engine needs to judge them. */
export const TrySubject = z.object({
  scope: Scope,
  date: IsoDate,
  ruleSetKey: z.string(),
  ruleSetVersion: z.number(),
  site: z.object({
    wearFromDb: z.number(),
    creditsActivePart: z.boolean(),
    usesUncertainty: z.boolean(),
  }),
  tasks: z.array(
    z.object({
      id: z.uuid(),
      name: z.string(),
      areaId: z.uuid().nullable(),
      zone: z.enum(["none", "single", "double"]),
      level: z.custom<TaskLevel>().nullable(),
    }),
  ),
  models: z.array(z.custom<ProtectorData>()),
  pairs: z.array(
    z.object({
      innerModelId: z.uuid(),
      outerModelId: z.uuid(),
      bands: z.custom<BandAttenuation>(),
    }),
  ),
  workers: z.array(
    z.object({
      id: z.uuid(),
      name: z.string(),
      employeeNumber: z.string(),
      mustWear: z.boolean(),
      personalTargetDb: z.number().nullable(),
      lengthMin: z.number(),
      tasks: z.array(
        z.object({
          taskId: z.uuid(),
          durationMin: z.number(),
          wornPct: z.number().nullable(),
        }),
      ),
      assignments: z.array(z.custom<KnownAssignment>()),
      fits: z.array(z.object({ modelId: z.uuid(), parDb: z.number() })),
    }),
  ),
  /** Of the scope, but without a nominal day to try anything on. */
  withoutDay: z.array(z.object({ id: z.uuid(), name: z.string() })),
  hasMore: z.boolean(),
});
export type TrySubject = z.infer<typeof TrySubject>;

const Counts = z.object({
  under: z.number(),
  over: z.number(),
  "cant-tell-yet": z.number(),
  "not-assessed": z.number(),
});

export const PlanRow = z.object({
  id: z.uuid(),
  name: z.string(),
  kind: z.enum(["changes", "timetable"]),
  scope: Scope,
  goal: z.string(),
  ruleSetKey: z.string(),
  ruleSetVersion: z.number(),
  keptAt: z.string(),
  authorName: z.string().nullable(),
  putAsideReason: z.string().nullable(),
  changesCount: z.number(),
  /** Steps that are open, and all of them. */
  stepsOpen: z.number(),
  stepsCount: z.number(),
  before: Counts,
  after: Counts,
  /** The loudest expected day after the changes, without protection and at the ear, dB. */
  worstOutsideDb: z.number().nullable(),
  worstAtEarDb: z.number().nullable(),
  revision: z.number(),
  can: Can("keep", "putAside", "step"),
});
export type PlanRow = z.infer<typeof PlanRow>;
export const PlanPage = pageOf(PlanRow);
export const PlanFilter = PageQuery.extend({
  siteId: z.uuid().optional(),
  state: z.enum(["kept", "all"]).default("kept"),
});

export const PlanView = PlanRow.extend({
  baseDate: IsoDate,
  methodVersion: z.number(),
  changes: z.array(PlanChange),
  /** Who is where when; null where the plan is one of changes. */
  timetable: KeptTimetable.nullable(),
  outcome: PlanOutcome,
  steps: z.array(PlanStepView),
  /** Who may have a step in hand, and which open findings of the plan's people one may mend: for whoever writes steps. */
  owners: z.array(z.object({ id: z.uuid(), name: z.string() })),
  findings: z.array(
    z.object({ id: z.uuid(), kind: z.string(), workerName: z.string().nullable() }),
  ),
  /** Names of what the changes speak of. */
  names: z.record(z.string(), z.string()),
  /** Each worker's latest judged day since it was kept. */
  since: z.array(
    z.object({
      workerId: z.uuid(),
      date: IsoDate,
      outsideDb: z.number().nullable(),
      atEarDb: z.number().nullable(),
      verdict: Verdict,
      grade: z.string(),
    }),
  ),
});
export type PlanView = z.infer<typeof PlanView>;
