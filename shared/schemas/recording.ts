import { z } from "zod";
import { Can, IsoDate, PageQuery, pageOf, Reason } from "./common";
import { OctaveBands } from "./evaluation";

/** How full scale becomes a sound pressure. */
export const RecordingCalibration = z.discriminatedUnion("kind", [
  z.object({ kind: z.literal("sensitivity"), pascalPerFullScale: z.number().positive().max(1e6) }),
  /** A recording of a calibrator's tone, sent beside it. */
  z.object({ kind: z.literal("tone"), toneDb: z.number().min(70).max(130) }),
  z.object({ kind: z.literal("none") }),
]);
export type RecordingCalibration = z.infer<typeof RecordingCalibration>;

const Levels = z.object({
  laeqDb: z.number(),
  lceqDb: z.number(),
  lcPeakDb: z.number(),
  lafMaxDb: z.number(),
  lasMaxDb: z.number(),
  octaveBandsDb: OctaveBands,
  /** Third octaves by nominal frequency, Hz. */
  thirdOctavesDb: z.array(z.object({ frequencyHz: z.number(), levelDb: z.number() })),
  clippedPct: z.number(),
});
export const RecordingAnalysis = z.object({
  durationS: z.number(),
  sampleRateHz: z.number(),
  bits: z.string(),
  /** False: levels relative to full scale, and so no level of a task. */
  isCalibrated: z.boolean(),
  channels: z.array(Levels).min(1).max(2),
});
export type RecordingAnalysis = z.infer<typeof RecordingAnalysis>;

export const RecordingForm = z.object({
  taskId: z.uuid(),
  calibration: RecordingCalibration,
  keepReason: Reason.nullable().default(null),
  deleteOn: IsoDate.nullable().default(null),
});
export const RecordingView = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  taskId: z.uuid(),
  taskName: z.string(),
  runId: z.uuid().nullable(),
  fileName: z.string(),
  sizeBytes: z.number(),
  state: z.enum(["uploaded", "analysing", "analysed", "failed", "cancelled"]),
  progressPct: z.number(),
  calibration: RecordingCalibration.nullable(),
  analysis: RecordingAnalysis.nullable(),
  failure: z
    .object({ code: z.string(), params: z.record(z.string(), z.union([z.string(), z.number()])) })
    .nullable(),
  isAudioKept: z.boolean(),
  keepReason: z.string().nullable(),
  deleteOn: IsoDate.nullable(),
  authorName: z.string().nullable(),
  createdAt: z.string(),
  revision: z.number(),
  can: Can("change"),
});
export type RecordingView = z.infer<typeof RecordingView>;
export const RecordingPage = pageOf(RecordingView);
export const RecordingFilter = PageQuery.extend({ taskId: z.uuid().optional() });
