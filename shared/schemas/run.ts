import { z } from "zod";
import { Can, IsoDate, Name, PageQuery, pageOf, Reason } from "./common";
import { LeftOutInput, OctaveBands, ReadingFacts, Settings } from "./evaluation";
import { findRunDoubts, RUN_DOUBTS } from "./run-doubts";

export const InstrumentInput = z.object({
  siteId: z.uuid(),
  kind: z.enum(["dosimeter", "sound-level-meter", "calibrator"]),
  class: z.enum(["1", "2"]),
  serialNumber: Name(60),
  name: Name(120),
  calibrationDueOn: IsoDate.nullable().default(null),
  presets: z.array(Settings).max(8).default([]),
  isArchived: z.boolean().default(false),
});
export type InstrumentInput = z.infer<typeof InstrumentInput>;
export const InstrumentView = InstrumentInput.extend({
  id: z.uuid(),
  /** A calibration that it failed and that none has followed. */
  calibrationFailedOn: IsoDate.nullable(),
  revision: z.number(),
  can: Can("change"),
});
export type InstrumentView = z.infer<typeof InstrumentView>;
export const InstrumentList = z.object({ rows: z.array(InstrumentView) });

const Facts = z.object({
  durationMin: z.number().positive().max(1440),
  checkBeforeDb: z.number().min(70).max(130).nullable().default(null),
  checkAfterDb: z.number().min(70).max(130).nullable().default(null),
  covers: z.enum(["shift", "projected", "part"]),
  /** Why the officer keeps a run against which something speaks (shared/schemas/run-doubts.ts). */
  keptReason: Reason.nullable().default(null),
  unusual: z.string().trim().max(10_000).nullable().default(null),
  readings: z.array(ReadingFacts).min(1).max(12),
});

/** Settings under which nothing was read. */
export const isEmptyReading = ({
  dosePct,
  averageDb,
  lceqDb,
  lasMaxDb,
  peak,
}: z.infer<typeof ReadingFacts>): boolean =>
  [dosePct, averageDb, lceqDb, lasMaxDb, peak].every((value) => value === null);

type Issues = { value: z.infer<typeof Facts>; issues: unknown[] };
function plausible(context: Issues): void {
  const { checkBeforeDb, checkAfterDb, keptReason, readings } = context.value;
  const add = (
    path: (string | number)[],
    code: string,
    params: Record<string, string | number> = {},
  ) =>
    context.issues.push({
      code: "custom",
      input: context.value,
      path,
      params: { code, ...params },
    });
  // What needs the instrument's certificate or the survey's plan is the server's to ask about.
  const doubts = findRunDoubts({
    checkBeforeDb,
    checkAfterDb,
    date: "",
    calibration: { dueOn: null, failedOn: null },
    durationMin: null,
    leastMin: null,
    needsChecks: false,
    covers: "part",
    shift: null,
    shown: [],
  });
  if (keptReason === null)
    for (const { code, params } of doubts) add(["keptReason"], code, { ...params });
  readings.forEach((reading, index) => {
    if (isEmptyReading(reading)) add(["readings", index, "averageDb"], "reading-empty");
  });
}

export const RunInput = Facts.extend({
  instrumentId: z.uuid(),
  workerId: z.uuid(),
  date: IsoDate,
  shiftId: z.uuid().nullable().default(null),
}).check((context) => plausible(context as unknown as Issues));
export type RunInput = z.infer<typeof RunInput>;

export const RunCorrection = Facts.extend({
  /** None, where all that it logged is its time history. */
  readings: z.array(ReadingFacts).max(12),
  reason: Reason,
  isVoid: z.boolean().default(false),
}).check((context) => plausible(context as unknown as Issues));
export type RunCorrection = z.infer<typeof RunCorrection>;

/** A reading as it is stored: an octave spectrum beside it where a meter gave one, and what it was read off. */
export const StoredReading = ReadingFacts.extend({
  octaveBandsDb: OctaveBands.nullable(),
  source: z.enum(["instrument", "history", "recording"]),
});
export type StoredReading = z.infer<typeof StoredReading>;

export const RunView = Facts.omit({ durationMin: true, readings: true }).extend({
  id: z.uuid(),
  siteId: z.uuid(),
  instrumentId: z.uuid(),
  instrumentName: z.string(),
  serialNumber: z.string(),
  workerId: z.uuid().nullable(),
  workerName: z.string().nullable(),
  areaName: z.string().nullable(),
  taskId: z.uuid().nullable(),
  taskName: z.string().nullable(),
  surveyId: z.uuid().nullable(),
  surveyName: z.string().nullable(),
  place: z.string().nullable(),
  date: IsoDate,
  shiftId: z.uuid().nullable(),
  /** Not back yet: no duration, no reading. */
  isOut: z.boolean(),
  /** ISO instants; null where a run was typed with its length alone. */
  outAt: z.string().nullable(),
  backAt: z.string().nullable(),
  /** Null while it is out. */
  durationMin: z.number().nullable(),
  /** None where it is out, or where all that it logged is its time history. */
  readings: z.array(StoredReading),
  /** What is left out of its history; absent: nothing. */
  leftOut: LeftOutInput.optional(),
  /** What speaks against it and was kept all the same. */
  doubts: z.array(z.enum(RUN_DOUBTS)),
  historyId: z.uuid().nullable(),
  files: z.array(z.object({ id: z.uuid(), name: z.string(), mediaType: z.string() })),
  isVoid: z.boolean(),
  revision: z.number(),
  authorName: z.string().nullable(),
  recordedAt: z.string(),
  can: Can("correct"),
});
export type RunView = z.infer<typeof RunView>;
export const RunPage = pageOf(RunView);
export const RunFilter = PageQuery.extend({
  workerId: z.uuid().optional(),
  date: IsoDate.optional(),
  instrumentId: z.uuid().optional(),
  siteId: z.uuid().optional(),
  surveyId: z.uuid().optional(),
  taskId: z.uuid().optional(),
});
