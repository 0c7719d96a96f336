import { z } from "zod";
import { Can, IsoDate, PageQuery, pageOf, Reason } from "./common";
import { ReadingFacts, UnaccountedInput } from "./evaluation";

/** What a column of levels can be. `las`: the slow level at the instant; `las-max`: its maximum in the interval. */
export const HistoryChannel = z.enum([
  "laeq",
  "las",
  "las-max",
  "laf-max",
  "lceq",
  "lcpeak",
  "lzpeak",
]);
export type HistoryChannel = z.infer<typeof HistoryChannel>;

const Delimiter = z.enum([",", ";", "\t", "|", " "]);

const Levels = z
  .array(
    z.object({
      column: z.number().int().min(0).max(500),
      channel: HistoryChannel,
      /** dB; tenths of a decibel; pascals. */
      unit: z.enum(["dB", "dB/10", "Pa"]).default("dB"),
    }),
  )
  .max(7);
const MappingFacts = z.object({
  /** Worksheet of a workbook; null: the first. */
  sheet: z.string().max(120).nullable().default(null),
  delimiter: Delimiter.default(","),
  /** Lines before the first values, the head line among them. */
  skipLines: z.number().int().min(0).max(200),
  decimal: z.enum([".", ","]),
  /** A date and a time in two columns, or both in one, or seconds since the start. */
  time: z.discriminatedUnion("kind", [
    z.object({ kind: z.literal("date-time"), column: z.number().int().min(0).max(500) }),
    z.object({
      kind: z.literal("date-and-time"),
      dateColumn: z.number().int().min(0).max(500),
      timeColumn: z.number().int().min(0).max(500),
    }),
    z.object({ kind: z.literal("time-of-day"), column: z.number().int().min(0).max(500) }),
    z.object({
      kind: z.literal("elapsed"),
      column: z.number().int().min(0).max(500),
      unit: z.enum(["s", "ms", "hh:mm:ss"]),
    }),
  ]),
  /** Order of the parts of a date. */
  dateOrder: z.enum(["ymd", "dmy", "mdy"]).default("ymd"),
  /** Start of the first interval where the file does not say the date: local date and time. */
  startsAt: z.string().max(40).nullable().default(null),
  /** What the file's clock showed: the site's own time, or UTC. */
  clock: z.enum(["site", "utc"]).default("site"),
  levels: Levels.min(1),
  /** Text that marks a value over or under the range. */
  overRange: z.array(z.string().min(1).max(20)).max(10).default([]),
  underRange: z.array(z.string().min(1).max(20)).max(10).default([]),
});
/** How an instrument's export is to be read; kept per instrument. Columns are counted from 0. */
export const HistoryMapping = MappingFacts.refine(
  ({ levels }) => new Set(levels.map(({ channel }) => channel)).size === levels.length,
  {
    path: ["levels"],
    params: { code: "channel-twice" },
  },
);
export type HistoryMapping = z.infer<typeof HistoryMapping>;
/** What was recognised in a file: its time at least, and the levels whose heads say what they are. */
export const ProposedMapping = MappingFacts.extend({ levels: Levels });
export type ProposedMapping = z.infer<typeof ProposedMapping>;

/** Beginning of a file and what was recognised in it. */
export const HistoryHead = z.object({
  format: z.enum(["text", "xlsx"]),
  encoding: z.string().nullable(),
  sheets: z.array(z.string()),
  /** Cells of the first lines, and what they were told apart by; absent in a workbook. */
  lines: z.array(z.array(z.string())),
  delimiter: Delimiter.optional(),
  /** A mapping that fits what was seen; null where nothing did. */
  proposed: ProposedMapping.nullable(),
  /** Where the proposal comes from: remembered for the instrument, or recognised in the file. */
  proposedFrom: z.enum(["instrument", "file"]).nullable(),
});
export type HistoryHead = z.infer<typeof HistoryHead>;

export const HistoryIssue = z.object({
  line: z.number(),
  column: z.string().nullable(),
  code: z.string(),
  params: z.record(z.string(), z.union([z.string(), z.number()])),
  /** Refuses the file, asks, or only tells what was understood. */
  severity: z.enum(["refused", "asked", "told"]),
});
export type HistoryIssue = z.infer<typeof HistoryIssue>;

export const HistoryReport = z.object({
  lines: z.number(),
  valuesCount: z.number(),
  intervalMs: z.number().nullable(),
  startsAt: z.string().nullable(),
  endsAt: z.string().nullable(),
  channels: z.array(
    z.object({
      channel: HistoryChannel,
      missing: z.number(),
      overRange: z.number(),
      underRange: z.number(),
      lowestDb: z.number().nullable(),
      highestDb: z.number().nullable(),
    }),
  ),
  issues: z.array(HistoryIssue),
  issuesCount: z.number(),
});
export type HistoryReport = z.infer<typeof HistoryReport>;

export const HistoryImportState = z.enum([
  "uploaded",
  "reading",
  "ready",
  "refused",
  "storing",
  "stored",
  "cancelled",
  "failed",
]);
/** Largest file of a history that is taken in, bytes. */
export const HISTORY_LIMIT_BYTES = 400 * 1024 * 1024;

/** A form's empty field is no id. */
const IdOrNone = z.union([z.literal("").transform(() => null), z.uuid(), z.null()]).default(null);
export const HistoryImportForm = z
  .object({
    instrumentId: z.uuid(),
    /** The run it belongs to; null: a new one for `workerId`. */
    runId: IdOrNone,
    workerId: IdOrNone,
    file: z.object({
      name: z.string().min(1).max(255),
      sizeBytes: z.number(),
      sha256: z.string(),
    }),
  })
  .refine(({ runId, workerId }) => runId !== null || workerId !== null, {
    path: ["workerId"],
    params: { code: "run-or-worker-needed" },
  });
export const HistoryImportView = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  instrumentId: z.uuid(),
  instrumentName: z.string(),
  serialNumber: z.string(),
  runId: z.uuid().nullable(),
  workerId: z.uuid().nullable(),
  workerName: z.string().nullable(),
  fileName: z.string(),
  sizeBytes: z.number(),
  state: HistoryImportState,
  progressPct: z.number(),
  head: HistoryHead.nullable(),
  mapping: HistoryMapping.nullable(),
  report: HistoryReport.nullable(),
  /** Codes of what was asked and is accepted. */
  answers: z.array(z.string()),
  /** The site's zone, in which the file's clock is read. */
  timeZone: z.string(),
  /** The worker's shift that it speaks for, once its times are known; null where none is. */
  shift: z
    .object({
      from: z.string(),
      to: z.string(),
      shiftMin: z.number(),
      insideMin: z.number().nullable(),
      startOffMin: z.number().nullish(),
      endOffMin: z.number().nullish(),
    })
    .nullable(),
  historyId: z.uuid().nullable(),
  authorName: z.string().nullable(),
  createdAt: z.string(),
  revision: z.number(),
  can: Can("change"),
});
export type HistoryImportView = z.infer<typeof HistoryImportView>;
export const HistoryImportPage = pageOf(
  HistoryImportView.omit({ head: true, report: true, shift: true }),
);
export const HistoryImportFilter = PageQuery.extend({ siteId: z.uuid().optional() });
/** Read it by this mapping: a report, nothing stored. `answers`: codes of what was asked and is accepted. */
export const HistoryReadOrder = z.object({
  mapping: HistoryMapping,
  answers: z.array(z.string().max(60)).max(20).default([]),
});
export type HistoryReadOrder = z.infer<typeof HistoryReadOrder>;
export const HistoryStoreOrder = z.object({
  covers: z.enum(["shift", "projected", "part"]),
  keptReason: Reason.nullable().default(null),
});
export type HistoryStoreOrder = z.infer<typeof HistoryStoreOrder>;

/** A stretch of a history, seconds from its start: a task's bracket, or left out for a reason. */
export const HistoryStretch = z
  .discriminatedUnion("kind", [
    z.object({
      kind: z.literal("task"),
      taskId: z.uuid(),
      fromS: z.number().min(0).max(86_400),
      toS: z.number().min(0).max(86_400),
    }),
    z.object({
      kind: z.literal("left-out"),
      reason: Reason,
      fromS: z.number().min(0).max(86_400),
      toS: z.number().min(0).max(86_400),
    }),
  ])
  .refine(({ fromS, toS }) => toS > fromS, {
    path: ["toS"],
    params: { code: "ends-before-it-starts" },
  });
export type HistoryStretch = z.infer<typeof HistoryStretch>;
export const HistoryStretches = z.object({
  stretches: z.array(HistoryStretch).max(200),
  /** How the time that is left out was; null, where some is: unknown. */
  leftOut: UnaccountedInput.nullable().default(null),
  /** Why its run is kept all the same, where something speaks against it now. */
  keptReason: Reason.nullable().default(null),
  reason: Reason.nullable().default(null),
});
export type HistoryStretches = z.infer<typeof HistoryStretches>;

export const HistoryView = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  timeZone: z.string(),
  runId: z.uuid(),
  workerId: z.uuid().nullable(),
  workerName: z.string().nullable(),
  date: IsoDate,
  instrumentName: z.string(),
  serialNumber: z.string(),
  fileId: z.uuid(),
  fileName: z.string(),
  startsAt: z.string(),
  intervalMs: z.number(),
  valuesCount: z.number(),
  channels: z.array(HistoryChannel),
  stretches: z.array(HistoryStretch),
  /** How the time that is left out was; null where none is. */
  leftOut: UnaccountedInput.nullable(),
  /** What its run speaks for. */
  covers: z.enum(["shift", "projected", "part"]),
  taskNames: z.record(z.string(), z.string()),
  /** Tasks of the worker's shift, to draw. */
  tasks: z.array(z.object({ id: z.uuid(), name: z.string(), durationMin: z.number() })),
  keptReason: z.string().nullable(),
  isVoid: z.boolean(),
  revision: z.number(),
  /** Who drew what stands, or brought the history in, and when. */
  authorName: z.string().nullable(),
  savedAt: z.string(),
  can: Can("change"),
});
export type HistoryView = z.infer<typeof HistoryView>;

/** Lowest and highest level of each bucket, hundredths of a decibel; null where nothing was counted. */
export const EnvelopeQuery = z.object({
  fromS: z.coerce.number().min(0).max(86_400).default(0),
  toS: z.coerce.number().min(0).max(86_400).optional(),
  buckets: z.coerce.number().int().min(10).max(4000).default(1200),
});
export const Envelope = z.object({
  fromS: z.number(),
  bucketS: z.number(),
  channels: z.record(
    z.string(),
    z.object({ low: z.array(z.number().nullable()), high: z.array(z.number().nullable()) }),
  ),
});
export type Envelope = z.infer<typeof Envelope>;

const Evaluated = z.object({
  durationS: z.number(),
  readings: z.array(
    ReadingFacts.extend({
      /** Name of the criterion or setting it serves. */
      label: z.string(),
      bound: z.enum(["exact", "upper", "lower"]),
      from: HistoryChannel,
    }),
  ),
  laeqDb: z.number().nullable(),
  lceqDb: z.number().nullable(),
  lasMaxDb: z.number().nullable(),
  peak: ReadingFacts.shape.peak,
  percentilesDb: z.record(z.string(), z.number()),
});
const LevelFigure = z.object({
  levelDb: z.number(),
  bound: z.enum(["exact", "upper", "lower"]),
});
const TaskFigures = z.object({
  durationS: z.number(),
  laeqDb: z.number().nullable(),
  /** Under the first of the readings, percent, and its share in the whole. */
  dosePct: z.number().nullable(),
  sharePct: z.number().nullable(),
});
/** What a history comes to: with the stretches left out, and with everything counted. */
export const HistoryAnalysis = z.object({
  counted: Evaluated,
  everything: Evaluated,
  tasks: z.array(TaskFigures.extend({ taskId: z.uuid(), taskName: z.string() })),
  /** What counts and lies under no bracket; null where none is drawn, or nothing is left. */
  rest: TaskFigures.nullable(),
  distribution: z.array(z.object({ fromDb: z.number(), sharePct: z.number() })),
  /** Dose so far at the end of each bucket, percent, per criterion. */
  runningDose: z.array(
    z.object({
      label: z.string(),
      settings: ReadingFacts.shape.settings,
      bound: z.enum(["exact", "upper", "lower"]),
      bucketS: z.number(),
      dosePct: z.array(z.number()),
    }),
  ),
  /** The picture as a table: each quarter of an hour of the clock, the first and the last shorter. */
  quarters: z.array(
    z.object({
      fromS: z.number(),
      toS: z.number(),
      laeq: LevelFigure.nullable(),
      slowMax: LevelFigure.nullable(),
      /** Dose so far at the end, percent, in the order of `runningDose`. */
      dosePct: z.array(z.number()),
    }),
  ),
});
export type HistoryAnalysis = z.infer<typeof HistoryAnalysis>;
