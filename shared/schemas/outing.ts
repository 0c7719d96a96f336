import { z } from "zod";
import { Can, IsoDate, LevelDb, Name, Reason } from "./common";
import { OctaveBands, ReadingFacts } from "./evaluation";

export const OutingReturn = z.object({
  /** ISO instant until which it was worn. */
  backAt: z.iso.datetime({ offset: true }),
  checkAfterDb: z.number().min(70).max(130).nullable().default(null),
  covers: z.enum(["shift", "projected", "part"]),
  readings: z.array(ReadingFacts).max(12),
  doubts: z
    .array(z.enum(["clipped", "under-range"]))
    .max(2)
    .default([]),
  /** Why the run is kept for results in spite of what speaks against it. */
  keptReason: Reason.nullable().default(null),
  /** Why the run is discarded: it stays on record, struck. */
  discardReason: Reason.nullable().default(null),
  unusual: z.string().trim().max(10_000).nullable().default(null),
});
export type OutingReturn = z.infer<typeof OutingReturn>;

/** An instrument goes out: on a worker, or to a place. Its settings are those of its preset. */
export const OutingStart = z.object({
  instrumentId: z.uuid(),
  workerId: z.uuid().nullable().default(null),
  areaId: z.uuid().nullable().default(null),
  surveyId: z.uuid().nullable().default(null),
  date: IsoDate,
  /** ISO instant. */
  outAt: z.iso.datetime({ offset: true }),
  checkBeforeDb: z.number().min(70).max(130).nullable().default(null),
  /** Why it goes out in spite of a certificate that is out of date. */
  keptReason: Reason.nullable().default(null),
  /** Of a day gone by: it has come back since, and goes down as one run. */
  back: OutingReturn.omit({ discardReason: true }).nullable().default(null),
});
export type OutingStart = z.infer<typeof OutingStart>;

/** A run that was started by mistake is taken back with a reason. */
export const OutingUndo = z.object({ reason: Reason });
export type OutingUndo = z.infer<typeof OutingUndo>;

/** A row of Out and back: one instrument of the site, what it is doing and what it did today. */
export const OutingRow = z.object({
  instrumentId: z.uuid(),
  name: z.string(),
  serialNumber: z.string(),
  kind: z.string(),
  class: z.string(),
  calibrationDueOn: IsoDate.nullable(),
  /** A calibration that it failed and that none has followed. */
  calibrationFailedOn: IsoDate.nullable(),
  presets: z.array(ReadingFacts.shape.settings),
  /** Reserved for today by a survey. */
  reservedFor: z.object({ surveyId: z.uuid(), surveyName: z.string() }).nullable(),
  run: z
    .object({
      id: z.uuid(),
      revision: z.number(),
      isOut: z.boolean(),
      workerId: z.uuid().nullable(),
      workerName: z.string().nullable(),
      employeeNumber: z.string().nullable(),
      areaName: z.string().nullable(),
      surveyId: z.uuid().nullable(),
      date: IsoDate,
      outAt: z.string().nullable(),
      backAt: z.string().nullable(),
      /** When the worker's shift ends, so that a late return can be asked about. */
      expectedBackAt: z.string().nullable(),
      checkBeforeDb: z.number().nullable(),
      checkAfterDb: z.number().nullable(),
      readingsCount: z.number(),
      isVoid: z.boolean(),
      doubts: z.array(z.string()),
      keptReason: z.string().nullable(),
      authorName: z.string().nullable(),
      historyId: z.uuid().nullable(),
    })
    .nullable(),
});
export type OutingRow = z.infer<typeof OutingRow>;
export const OutingBoard = z.object({
  siteId: z.uuid(),
  timeZone: z.string(),
  date: IsoDate,
  rows: z.array(OutingRow),
  can: Can("change"),
});
export type OutingBoard = z.infer<typeof OutingBoard>;
export const OutingQuery = z.object({ date: IsoDate.optional() });

/** A worker's shift has been over for this long when an instrument comes back: was it worn until then? No source. */
export const LATE_RETURN_MIN = 30;
/** Longer than any shift: a time before the one at which it went out is the next day's. No source. */
export const LONG_OUTING_MIN = 16 * 60;
export const isLateReturn = (backAt: string, expectedBackAt: string | null): boolean =>
  expectedBackAt !== null &&
  Date.parse(backAt) - Date.parse(expectedBackAt) > LATE_RETURN_MIN * 60_000;

/** Under what a sound level meter's LAeq stands among the readings: energy, no threshold, no time weighting. */
export const LAEQ_SETTINGS = {
  criterionLevelDb: 85,
  exchangeRateDb: 3,
  thresholdDb: null,
  weighting: "A",
  response: "none",
} as const;

export const FILE_LIMIT_BYTES = 20 * 1024 ** 2;
export const FILE_KINDS = ["image/png", "image/jpeg", "image/webp", "application/pdf"] as const;
/** What a form with a file becomes before it is parsed. */
export const FileForm = z.object({
  file: z.object({ name: z.string().min(1).max(500), sizeBytes: z.number(), sha256: z.string() }),
});

/** A sample taken by hand, at a task. */
export const SampleInput = z.object({
  surveyId: z.uuid().nullable().default(null),
  taskId: z.uuid(),
  instrumentId: z.uuid(),
  workerId: z.uuid().nullable().default(null),
  place: Name(200).nullable().default(null),
  date: IsoDate,
  startedAt: z.iso.datetime({ offset: true }),
  durationMin: z.number().positive().max(1440),
  levelDb: LevelDb,
  lceqDb: z.number().min(20).max(180).nullable().default(null),
  lasMaxDb: z.number().min(20).max(180).nullable().default(null),
  peak: ReadingFacts.shape.peak,
  octaveBandsDb: OctaveBands.nullable().default(null),
  checkBeforeDb: z.number().min(70).max(130).nullable().default(null),
  checkAfterDb: z.number().min(70).max(130).nullable().default(null),
  doubts: z
    .array(z.enum(["clipped", "under-range"]))
    .max(2)
    .default([]),
  keptReason: Reason.nullable().default(null),
  unusual: z.string().trim().max(10_000).nullable().default(null),
  /** Files sent before, as photographs. */
  fileIds: z.array(z.uuid()).max(6).default([]),
});
export type SampleInput = z.infer<typeof SampleInput>;

export const CalibrationInput = z
  .object({
    doneOn: IsoDate,
    hasPassed: z.boolean(),
    foundErrorDb: z.number().min(-20).max(20).nullable().default(null),
    dueOn: IsoDate.nullable().default(null),
    certificateFileId: z.uuid().nullable().default(null),
    note: z.string().trim().max(2000).default(""),
  })
  .refine(({ hasPassed, dueOn }) => hasPassed || dueOn === null, {
    path: ["dueOn"],
    params: { code: "failed-has-no-due-date" },
  });
export type CalibrationInput = z.infer<typeof CalibrationInput>;
export const CalibrationView = z.object({
  id: z.uuid(),
  doneOn: IsoDate,
  hasPassed: z.boolean(),
  foundErrorDb: z.number().nullable(),
  dueOn: IsoDate.nullable(),
  certificateFileId: z.uuid().nullable(),
  note: z.string(),
  authorName: z.string().nullable(),
  createdAt: z.string(),
});
export type CalibrationView = z.infer<typeof CalibrationView>;
/** An instrument's calibrations, and what hangs on it since its last good check. */
export const CalibrationHistory = z.object({
  rows: z.array(CalibrationView),
  /** ISO instant before which nothing speaks against it; null where no check of it is on record. */
  lastGoodCheckAt: z.string().nullable(),
  /** What was good: the laboratory, or a run's field checks. */
  lastGoodCheck: z.enum(["calibration", "field-check"]).nullable(),
  /** Filled where the latest calibration failed. */
  inDoubt: z.array(
    z.object({
      runId: z.uuid(),
      date: IsoDate,
      workerId: z.uuid().nullable(),
      workerName: z.string().nullable(),
      taskName: z.string().nullable(),
      isVoid: z.boolean(),
      keptReason: z.string().nullable(),
      /** Days whose current result rests on the run. */
      resultsCount: z.number(),
    }),
  ),
});
export type CalibrationHistory = z.infer<typeof CalibrationHistory>;

export const FileView = z.object({
  id: z.uuid(),
  name: z.string(),
  mediaType: z.string(),
  sizeBytes: z.number(),
  sha256: z.string(),
  uploadedAt: z.string(),
});
export type FileView = z.infer<typeof FileView>;
