import { z } from "zod";
import { Can, IsoDate, PageQuery, pageOf, Reason } from "./common";
import { InstrumentClassName } from "./evaluation";

export const RECORDING_LIMIT_BYTES = 4 * 1024 ** 3;
/** A calibrator's tone lasts a minute at most. */
export const TONE_LIMIT_BYTES = 100 * 1024 ** 2;

/** Why a recording cannot be used, or not without somebody's word for it. Texts: shared/recordings. */
export const RECORDING_CODES = [
  "recording-not-wav",
  "recording-header-damaged",
  "recording-compressed",
  "recording-format-unsupported",
  "recording-rate-unsupported",
  "recording-channels-unsupported",
  "recording-empty",
  "recording-length-unstated",
  "recording-truncated",
  "recording-longer",
  "recording-not-numbers",
  "recording-silent",
  "recording-clipped",
  "tone-not-found",
  "tone-unsteady",
  "tone-frequency-off",
] as const;
export type RecordingCode = (typeof RECORDING_CODES)[number];

/** Faults of a recording that can still be analysed when an officer says so. */
export const ACCEPTABLE_FAULTS = [
  "recording-length-unstated",
  "recording-truncated",
  "recording-longer",
  "recording-clipped",
] as const satisfies readonly RecordingCode[];
export type AcceptableFault = (typeof ACCEPTABLE_FAULTS)[number];

export const isAcceptable = (code: string): code is AcceptableFault =>
  ACCEPTABLE_FAULTS.some((one) => one === code);

/** How full scale becomes a sound pressure, as it is sent in. */
const CalibrationInput = z.discriminatedUnion("kind", [
  z.object({
    kind: z.literal("sensitivity"),
    pascalPerFullScale: z.number().positive().max(1e6),
  }),
  /** A calibrator's tone that was sent in and measured before. */
  z.object({ kind: z.literal("tone"), toneId: z.uuid() }),
  z.object({ kind: z.literal("none") }),
]);

/** A calibrator's tone, of which no audio is kept. */
export const CalibrationTone = z.object({
  id: z.uuid(),
  fileName: z.string(),
  /** What the calibrator gives. */
  toneDb: z.number(),
  frequencyHz: z.number(),
  /** By channel; null where there was no tone. */
  channels: z.array(
    z
      .object({
        pascalPerFullScale: z.number(),
        frequencyHz: z.number(),
        spreadDb: z.number(),
        durationS: z.number(),
      })
      .nullable(),
  ),
});
export type CalibrationTone = z.infer<typeof CalibrationTone>;

/** The same as it is kept: with the tone's measured values. */
export const RecordingCalibration = z.discriminatedUnion("kind", [
  CalibrationInput.options[0],
  z.object({ kind: z.literal("tone"), tone: CalibrationTone }),
  CalibrationInput.options[2],
]);
export type RecordingCalibration = z.infer<typeof RecordingCalibration>;

const level = z.number().nullable();
const Band = z.object({ frequencyHz: z.number(), levelDb: level });
export type RecordingBand = z.infer<typeof Band>;

export const RecordingLevels = z.object({
  /** False: levels are relative to full scale, and so none of a task. */
  isAbsolute: z.boolean(),
  /** Nothing above the self noise, while the other channel has something. */
  isSilent: z.boolean(),
  laeqDb: level,
  lceqDb: level,
  lcPeakDb: level,
  lafMaxDb: level,
  lasMaxDb: level,
  /** By nominal frequency, unweighted, as far as the sampling rate reaches. */
  octaveBandsDb: z.array(Band),
  thirdOctavesDb: z.array(Band),
  clippedPct: z.number(),
});
export type RecordingLevels = z.infer<typeof RecordingLevels>;

const Params = z.record(z.string(), z.union([z.string(), z.number()]));
export const RecordingAnalysis = z.object({
  durationS: z.number(),
  sampleRateHz: z.number(),
  sampleFormat: z.string(),
  channels: z.array(RecordingLevels).min(1).max(2),
  /** Those that were accepted. */
  faults: z.array(z.object({ code: z.enum(ACCEPTABLE_FAULTS), params: Params })),
});
export type RecordingAnalysis = z.infer<typeof RecordingAnalysis>;

const FormFile = z.object({
  name: z.string().min(1).max(255),
  sizeBytes: z.number(),
  sha256: z.string(),
});
/** A form's field that holds JSON. */
const Json = z.string().transform((text, context): unknown => {
  try {
    return JSON.parse(text);
  } catch {
    context.issues.push({ code: "custom", input: text, params: { code: "invalid_type" } });
    return z.NEVER;
  }
});
const emptyIsNull = z.literal("").transform(() => null);

export const RecordingForm = z
  .object({
    taskId: z.uuid(),
    calibration: Json.pipe(CalibrationInput),
    /** Why the audio is kept, and until when; neither: it goes as soon as it is analysed. */
    keepReason: z.union([emptyIsNull, Reason]).nullable().default(null),
    deleteOn: z.union([emptyIsNull, IsoDate]).nullable().default(null),
    file: FormFile,
  })
  .refine(({ keepReason, deleteOn }) => (keepReason === null) === (deleteOn === null), {
    path: ["deleteOn"],
    params: { code: "keep-reason-and-date" },
  });
export type RecordingForm = z.infer<typeof RecordingForm>;

export const ToneForm = z
  .object({
    /** The task that is recorded, or the site where nobody's task is. */
    taskId: z.uuid().optional(),
    siteId: z.uuid().optional(),
    toneDb: z.coerce.number().min(70).max(130),
    frequencyHz: z.coerce.number().min(100).max(4000).default(1000),
    file: FormFile,
  })
  .refine(({ taskId, siteId }) => (taskId === undefined) !== (siteId === undefined), {
    path: ["taskId"],
    params: { code: "required" },
  });
export type ToneForm = z.infer<typeof ToneForm>;

export const RecordingFaults = z.object({
  accept: z.array(z.enum(ACCEPTABLE_FAULTS)).min(1).max(ACCEPTABLE_FAULTS.length),
  reason: Reason,
});
export type RecordingFaults = z.infer<typeof RecordingFaults>;

export const RecordingKeep = z.object({ keepReason: Reason, deleteOn: IsoDate });
export type RecordingKeep = z.infer<typeof RecordingKeep>;

/** The task's level from a recording: the whole of it, or its spectrum under the level that the task has. */
export const RecordingUse = z.object({
  how: z.enum(["level", "shape"]),
  /** From 1. */
  channel: z.number().int().min(1).max(2),
  effectiveFrom: IsoDate,
  instrument: InstrumentClassName.nullable().default(null),
  /** Needed where the task has a level already. */
  reason: Reason.nullable().default(null),
});
export type RecordingUse = z.infer<typeof RecordingUse>;

export const RecordingView = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  timeZone: z.string(),
  taskId: z.uuid(),
  taskName: z.string(),
  fileName: z.string(),
  sizeBytes: z.number(),
  /** `asked`: it waits for an officer's word on a fault. */
  state: z.enum(["uploaded", "analysing", "asked", "analysed", "failed", "cancelled"]),
  progressPct: z.number(),
  calibration: RecordingCalibration,
  analysis: RecordingAnalysis.nullable(),
  failure: z.object({ code: z.string(), params: Params }).nullable(),
  accepted: z.array(z.object({ code: z.enum(ACCEPTABLE_FAULTS), reason: z.string() })),
  /** Of the audio, while it is here. */
  fileId: z.uuid().nullable(),
  keepReason: z.string().nullable(),
  deleteOn: IsoDate.nullable(),
  /** Dates from which a level of the task rests on it. */
  usedFrom: z.array(IsoDate),
  authorName: z.string().nullable(),
  createdAt: z.string(),
  revision: z.number(),
  can: Can("change"),
});
export type RecordingView = z.infer<typeof RecordingView>;
export const RecordingPage = pageOf(RecordingView);
export const RecordingFilter = PageQuery.extend({
  taskId: z.uuid().optional(),
  siteId: z.uuid().optional(),
  /** Only those whose audio is kept. */
  isKept: z.literal("yes").optional(),
});
