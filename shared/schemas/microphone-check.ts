import { z } from "zod";
import { Can, IsoDate } from "./common";
import { Ear, EarBands, Size } from "./fit";

/** Two minutes of two channels in float at 192 kHz. */
export const CHECK_FILE_LIMIT_BYTES = 256 * 1024 ** 2;

/** Why a pair of recordings says nothing, or not what it seems to. Texts are the client's. */
export const CHECK_CODES = [
  "channels-swapped",
  "channel-dead",
  "rates-differ",
  "too-short",
  "no-common-noise",
  "one-channel-only",
  "lengths-differ",
  "no-active-part",
] as const;
export type CheckCode = (typeof CHECK_CODES)[number];

/** From the ear canal or the cup's inside to the open ear, by band, dB: added to the noise reduction. */
export const Correction = z.object({
  kind: z.enum(["none", "open-ear", "own"]),
  bandsDb: z.array(z.number().min(-30).max(30)).length(8),
  source: z.string().trim().max(400),
});
export type Correction = z.infer<typeof Correction>;

/** One pair of channels: where outside and inside stand. */
export const CheckPart = z.object({
  active: z.enum(["off", "on"]),
  outside: z.object({
    file: z.number().int().min(0).max(3),
    channel: z.number().int().min(1).max(2),
  }),
  inside: z.object({
    file: z.number().int().min(0).max(3),
    channel: z.number().int().min(1).max(2),
  }),
});
export type CheckPart = z.infer<typeof CheckPart>;

const Band = z.object({
  frequencyHz: z.number(),
  outsideDb: z.number().nullable(),
  insideDb: z.number().nullable(),
  /** Squared coherence, 0 to 1, power mean over the band. */
  coherence: z.number().nullable(),
  noiseReductionDb: z.number().nullable(),
  /** Why the band says nothing. */
  reason: z.enum(["too-little-noise", "low-coherence", "beyond-rate"]).nullable(),
});
export const CheckPartAnalysis = z.object({
  active: z.enum(["off", "on"]),
  durationS: z.number(),
  sampleRateHz: z.number(),
  /** Inside behind outside, s. */
  delayS: z.number().nullable(),
  delaySamples: z.number().nullable(),
  bands: z.array(Band).length(8),
});
export const CheckAnalysis = z.object({
  isAbsolute: z.boolean(),
  parts: z.array(CheckPartAnalysis).min(1).max(2),
  ear: EarBands,
  parDb: z.number().nullable(),
  /** Standard uncertainty of the method, dB. */
  methodSdDb: z.number(),
  /** Null: no pair with the active part off and on, or a model without one. */
  active: z
    .object({
      hasPassed: z.boolean(),
      /** By band: what the test report says less what was found, dB. */
      shortfallDb: z.array(z.number().nullable()).length(8),
      toleranceDb: z.number(),
    })
    .nullable(),
  warnings: z.array(z.enum(CHECK_CODES)),
});
export type CheckAnalysis = z.infer<typeof CheckAnalysis>;

export const MicrophoneCheckView = z.object({
  id: z.uuid(),
  revision: z.number(),
  siteId: z.uuid(),
  workerId: z.uuid(),
  workerName: z.string(),
  modelId: z.uuid(),
  modelName: z.string(),
  ear: Ear,
  state: z.enum(["analysing", "analysed", "kept", "failed", "cancelled"]),
  progressPct: z.number(),
  parts: z.array(CheckPart),
  correction: Correction,
  files: z.array(z.string()),
  analysis: CheckAnalysis.nullable(),
  failure: z
    .object({
      code: z.string(),
      params: z.record(z.string(), z.union([z.string(), z.number()])),
    })
    .nullable(),
  fitTestId: z.uuid().nullable(),
  can: Can("change"),
});
export type MicrophoneCheckView = z.infer<typeof MicrophoneCheckView>;

/** Makes a trial of what was found: a fit test of its own, or the other ear of one of the same day. */
export const CheckKeep = z.object({
  testedOn: IsoDate,
  size: Size.nullable().default(null),
  needDb: z.number().min(0).max(80).nullable(),
  joinFitTestId: z.uuid().nullable().default(null),
});
export type CheckKeep = z.infer<typeof CheckKeep>;
