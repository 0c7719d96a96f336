import { z } from "zod";
import type { ProtectorData, TaskLevel } from "../acoustics/types";
import { IsoDate, Reason, TimeOfDay } from "./common";
import { Attenuation, LeftOutInput, ReadingFacts, UnaccountedInput } from "./evaluation";
import { DayFigures } from "./finding";
import { EntryNotices } from "./notice";
import { InstrumentView } from "./run";

export const ShiftTaskInput = z.object({
  taskId: z.uuid(),
  durationMin: z.number().positive().max(1440),
  wornPct: z.number().min(0).max(100).nullable().default(null),
  wornIsShiftWide: z.boolean().default(false),
});
export type ShiftTaskInput = z.infer<typeof ShiftTaskInput>;

/** What a shift says, apart from whose it is. Minutes beyond the shift are refused field by field. */
export const ShiftFacts = z.object({
  localStart: TimeOfDay,
  /** Which of the two, where the clock shows this time twice. */
  whichHour: z.enum(["first", "second"]).nullable().default(null),
  lengthMin: z.number().int().min(1).max(1440),
  unaccounted: UnaccountedInput.default({ how: "unknown" }),
  tasks: z.array(ShiftTaskInput).max(48),
  note: z.string().max(10_000).nullable().default(null),
});

type Shape = { value: z.infer<typeof ShiftFacts>; issues: unknown[] };
export function checkShiftFacts(context: Shape): void {
  const { tasks, lengthMin } = context.value;
  const sumMin = tasks.reduce((sum, task) => sum + task.durationMin, 0);
  if (sumMin > lengthMin + 1e-6) {
    context.issues.push({
      code: "custom",
      input: context.value,
      path: ["tasks"],
      params: { code: "tasks-longer-than-shift", sumMin, lengthMin, overMin: sumMin - lengthMin },
    });
  }
  const seen = new Set<string>();
  tasks.forEach(({ taskId }, index) => {
    if (seen.has(taskId))
      context.issues.push({
        code: "custom",
        input: taskId,
        path: ["tasks", index, "taskId"],
        params: { code: "task-twice" },
      });
    seen.add(taskId);
  });
}

/** A run typed into the day grid, one reading for each of its settings rows: a new run, or the next revision of one. */
export const GridRunInput = z.object({
  instrumentId: z.uuid(),
  runId: z.uuid().nullable().default(null),
  runRevision: z.number().int().nullable().default(null),
  durationMin: z.number().positive().max(1440),
  covers: z.enum(["shift", "projected", "part"]).default("shift"),
  readings: z.array(ReadingFacts).min(1).max(12),
});
export type GridRunInput = z.infer<typeof GridRunInput>;

export const DayRowInput = z.discriminatedUnion("kind", [
  ShiftFacts.extend({
    kind: z.literal("worked"),
    workerId: z.uuid(),
    /** The shift and revision that the row was opened with; null for a new one. */
    shiftId: z.uuid().nullable().default(null),
    revision: z.number().int().nullable().default(null),
    /** Why a saved shift is changed. */
    reason: Reason.nullable().default(null),
    /** A shift of exactly 24 hours is asked about once. */
    confirmsWholeDay: z.boolean().default(false),
    /** A shift whose end still lies ahead is asked about once. */
    confirmsOpenEnd: z.boolean().default(false),
    run: GridRunInput.nullable().default(null),
  }),
  z.object({ kind: z.literal("absent"), workerId: z.uuid() }),
  z.object({ kind: z.literal("not-absent"), workerId: z.uuid() }),
]);
export type DayRowInput = z.infer<typeof DayRowInput>;
export type WorkedRowInput = Extract<DayRowInput, { kind: "worked" }>;

/** Rows are checked one by one on the server, so that a bad one holds back no other. */
export const DaySaveInput = z.object({
  date: IsoDate,
  rows: z.array(z.record(z.string(), z.unknown())).min(1).max(500),
});

export const DayQuery = z.object({ date: IsoDate });

export const SavedShift = z.object({
  shiftId: z.uuid(),
  revision: z.number(),
  localStart: z.string(),
  whichHour: z.enum(["first", "second"]).nullable(),
  lengthMin: z.number(),
  unaccounted: UnaccountedInput,
  tasks: z.array(ShiftTaskInput),
  note: z.string().nullable(),
  authorName: z.string().nullable(),
  savedAt: z.string(),
});
export type SavedShift = z.infer<typeof SavedShift>;

export const GridRun = ReadingFacts.extend({
  runId: z.uuid(),
  runRevision: z.number(),
  readingId: z.uuid(),
  instrumentId: z.uuid(),
  instrumentClass: z.enum(["class-1-meter", "class-2-meter", "dosimeter"]),
  durationMin: z.number(),
  /** What is left out of the history that it was read off, and the minutes that it counts over. */
  leftOut: LeftOutInput.optional(),
  countedMin: z.number().optional(),
  covers: z.enum(["shift", "projected", "part"]),
  keptReason: z.string().nullable(),
});
export type GridRun = z.infer<typeof GridRun>;

export const GridTask = z.object({
  id: z.uuid(),
  name: z.string(),
  areaId: z.uuid().nullable(),
  zone: z.enum(["none", "single", "double"]),
  level: z.custom<TaskLevel>().nullable(),
  /** This crew's column; other tasks can be added to a row. */
  isColumn: z.boolean(),
});
export type GridTask = z.infer<typeof GridTask>;

export const GridRow = z.object({
  worker: z.object({
    id: z.uuid(),
    name: z.string(),
    employeeNumber: z.string(),
    mustWear: z.boolean(),
    personalTargetDb: z.number().nullable(),
    hiredOn: IsoDate,
    leftOn: IsoDate.nullable(),
  }),
  isLoan: z.boolean(),
  isAbsent: z.boolean(),
  nominal: z.array(z.object({ taskId: z.uuid(), durationMin: z.number() })),
  assignments: z.array(
    z.object({
      id: z.uuid(),
      taskId: z.uuid().nullable(),
      areaId: z.uuid().nullable(),
      innerModelId: z.uuid(),
      outerModelId: z.uuid().nullable(),
      ownFitDb: z.number().nullable(),
      activeCheckPassed: z.boolean(),
      combinationBands: Attenuation.nullable(),
      audioDb: z.number().nullable(),
    }),
  ),
  /** Last wearing time recorded per task. */
  lastWorn: z.record(z.string(), z.number()),
  /** Longest stay in each task in this worker's last year. */
  longestMin: z.record(z.string(), z.number()),
  saved: SavedShift.nullable(),
  /** Other shifts of the same day, at this or another site: they count into the day. */
  otherShifts: z.array(
    z.object({
      shiftId: z.uuid(),
      crewName: z.string().nullable(),
      localStart: z.string(),
      lengthMin: z.number(),
    }),
  ),
  readings: z.array(GridRun),
  lastShift: z
    .object({
      date: IsoDate,
      localStart: z.string(),
      lengthMin: z.number(),
      unaccounted: UnaccountedInput,
      tasks: z.array(ShiftTaskInput),
    })
    .nullable(),
  figures: DayFigures.nullable(),
});
export type GridRow = z.infer<typeof GridRow>;

export const DayGridView = z.object({
  crew: z.object({
    id: z.uuid(),
    name: z.string(),
    siteId: z.uuid(),
    siteName: z.string(),
    usualStart: z.string(),
    usualLengthMin: z.number(),
    timeZone: z.string(),
  }),
  date: IsoDate,
  today: IsoDate,
  settings: z.object({
    governingRuleSet: z.string(),
    ruleSetVersion: z.number(),
    comparisonRuleSets: z.array(z.string()),
    wearFromDb: z.number(),
    creditsActivePart: z.boolean(),
    usesUncertainty: z.boolean(),
  }),
  tasks: z.array(GridTask),
  models: z.array(z.custom<ProtectorData>()),
  instruments: z.array(
    InstrumentView.pick({
      id: true,
      name: true,
      serialNumber: true,
      class: true,
      kind: true,
      presets: true,
    }),
  ),
  rows: z.array(GridRow),
  notices: EntryNotices.nullable(),
});
export type DayGridView = z.infer<typeof DayGridView>;

export const RowIssue = z.object({
  path: z.array(z.union([z.string(), z.number()])),
  code: z.string(),
  params: z.record(z.string(), z.union([z.string(), z.number()])),
});

export const DaySaveView = z.object({
  entryId: z.uuid(),
  saved: z.array(
    z.object({
      index: z.number(),
      workerId: z.uuid(),
      shift: SavedShift.nullable(),
      figures: DayFigures.nullable(),
      readings: z.array(GridRun),
    }),
  ),
  /** Rows that were not stored, with what is wrong. */
  refused: z.array(
    z.object({ index: z.number(), workerId: z.string().nullable(), issues: z.array(RowIssue) }),
  ),
  /** Rows that somebody else saved in the meantime, with what stands now. */
  conflicts: z.array(
    z.object({ index: z.number(), workerId: z.uuid(), current: SavedShift.nullable() }),
  ),
  notices: EntryNotices,
});
export type DaySaveView = z.infer<typeof DaySaveView>;

export const ShiftCorrection = ShiftFacts.extend({
  reason: Reason,
  confirmsWholeDay: z.boolean().default(false),
  confirmsOpenEnd: z.boolean().default(false),
}).check((context) => checkShiftFacts(context as unknown as Shape));
export const ShiftVoid = z.object({ reason: Reason });

export const ShiftView = SavedShift.extend({
  workerId: z.uuid(),
  workerName: z.string(),
  date: IsoDate,
  timeZone: z.string(),
  crewId: z.uuid().nullable(),
  isVoid: z.boolean(),
  revisions: z.array(
    z.object({
      number: z.number(),
      reason: z.string().nullable(),
      authorName: z.string().nullable(),
      at: z.string(),
      lengthMin: z.number(),
      tasks: z.array(ShiftTaskInput.extend({ taskName: z.string() })),
      isVoid: z.boolean(),
    }),
  ),
  can: z.object({ correct: z.boolean() }),
});
