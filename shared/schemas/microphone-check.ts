import { z } from "zod";
import { Can, IsoDate, pageOf } from "./common";
import { OctaveBands } from "./evaluation";
import { Ear, EarBands, Size, TypedMicrophones } from "./fit";

/** A minute and a half of two channels in float at 192 kHz. */
export const CHECK_FILE_LIMIT_BYTES = 128 * 1024 ** 2;
/** A pair each for the active part off and on. */
export const CHECK_FILES_AT_MOST = 4;

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
  "channel-clipped",
  "not-calibrated",
  "bands-left-out",
  "active-bands-unheard",
  "above-bone-conduction",
] as const;
export type CheckCode = (typeof CHECK_CODES)[number];

/** From the ear canal or the cup's inside to the open ear, by band, dB: added to the noise reduction. */
export const Correction = z.object({
  kind: z.enum(["none", "open-ear", "own"]),
  bandsDb: z.array(z.number().min(-30).max(30)).length(8),
  source: z.string().trim().max(400),
});
export type Correction = z.infer<typeof Correction>;

const PascalPerFullScale = z.number().positive().max(1e6);
const Side = z.object({ toneId: z.uuid(), channel: z.number().int().min(1).max(2) });

/** How far the two microphones' levels can be held against each other, as it is sent in. */
export const CheckCalibrationInput = z.discriminatedUnion("kind", [
  z.object({
    kind: z.literal("sensitivity"),
    outsidePa: PascalPerFullScale,
    insidePa: PascalPerFullScale,
  }),
  /** Calibrators' tones that were sent in and measured before, each through the microphone it is named for. */
  z.object({ kind: z.literal("tone"), outside: Side, inside: Side }),
  /** Not calibrated, but seen to show the same level side by side. */
  z.object({ kind: z.literal("alike") }),
  z.object({ kind: z.literal("none") }),
]);
export type CheckCalibrationInput = z.infer<typeof CheckCalibrationInput>;

/** The same as it is kept: with what the tones gave. */
export const CheckCalibration = z.discriminatedUnion("kind", [
  CheckCalibrationInput.options[0],
  z.object({
    kind: z.literal("tone"),
    outsidePa: PascalPerFullScale,
    insidePa: PascalPerFullScale,
    outsideToneId: z.uuid(),
    insideToneId: z.uuid(),
  }),
  CheckCalibrationInput.options[2],
  CheckCalibrationInput.options[3],
  z.object({ kind: z.literal("typed") }),
]);
export type CheckCalibration = z.infer<typeof CheckCalibration>;

/** The noise that the rating is taken against: a task's octave bands as they stood; null elsewhere: the reference's. */
export const CheckSpectrum = z.object({
  taskId: z.uuid(),
  taskName: z.string(),
  bandsDb: OctaveBands,
});
export type CheckSpectrum = z.infer<typeof CheckSpectrum>;

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
  reason: z.enum(["too-little-noise", "low-coherence", "not-typed"]).nullable(),
});
const CheckPartAnalysis = z.object({
  active: z.enum(["off", "on"]),
  /** Null: typed. */
  durationS: z.number().nullable(),
  sampleRateHz: z.number().nullable(),
  /** Inside behind outside, s. */
  delayS: z.number().nullable(),
  delaySamples: z.number().nullable(),
  bands: z.array(Band).length(8),
});
export const CheckAnalysis = z.object({
  isAbsolute: z.boolean(),
  parts: z.array(CheckPartAnalysis).min(1).max(2),
  ear: EarBands,
  /** Null: bands that are needed said nothing, or the microphones can't be held against each other. */
  parDb: z.number().nullable(),
  /** Standard uncertainty of the method, dB. */
  methodSdDb: z.number(),
  /** Null: no pair with the active part off and on, or a model without one. */
  active: z
    .object({
      /** Null: a band that matters said nothing. */
      hasPassed: z.boolean().nullable(),
      /** By band: what the test report says less what was found, dB. */
      shortfallDb: z.array(z.number().nullable()).length(8),
      toleranceDb: z.number(),
    })
    .nullable(),
  warnings: z.array(z.enum(CHECK_CODES)),
});
export type CheckAnalysis = z.infer<typeof CheckAnalysis>;

/** A fit test can come of it: a rating was found, or without one whether the active part does its work. */
export const isKeepable = ({ parDb, active }: Pick<CheckAnalysis, "parDb" | "active">): boolean =>
  parDb !== null || (active !== null && active.hasPassed !== null);

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
  calibration: CheckCalibration,
  correction: Correction,
  spectrum: CheckSpectrum.nullable(),
  files: z.array(z.string()),
  analysis: CheckAnalysis.nullable(),
  failure: z
    .object({
      code: z.string(),
      params: z.record(z.string(), z.union([z.string(), z.number()])),
    })
    .nullable(),
  fitTestId: z.uuid().nullable(),
  authorName: z.string().nullable(),
  createdAt: z.string(),
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

export const MicrophoneCheckPage = pageOf(MicrophoneCheckView);

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

/** What is said of the recordings, beside the recordings. */
export const CheckInput = z.object({
  modelId: z.uuid(),
  ear: Ear,
  parts: z.array(CheckPart).min(1).max(2),
  calibration: CheckCalibrationInput,
  correction: Correction,
  /** Whose noise the rating is taken against; null: the reference's. */
  taskId: z.uuid().nullable().default(null),
});
export type CheckInput = z.infer<typeof CheckInput>;

/** Parts that can't be compared: none with the active part off, twice the same channel, a file that did not come. */
function partIssues({ check, files }: { check: CheckInput; files: readonly unknown[] }): string[] {
  const found: string[] = [];
  const { parts } = check;
  if (parts.filter(({ active }) => active === "off").length !== 1) found.push("one-part-off");
  const sides = parts.flatMap(({ outside, inside }) => [outside, inside]);
  if (sides.some(({ file }) => file >= files.length)) found.push("file-missing");
  if (new Set(sides.map(({ file, channel }) => `${file} ${channel}`)).size < sides.length)
    found.push("channel-named-twice");
  return found;
}

export const MicrophoneCheckForm = z
  .object({
    check: Json.pipe(CheckInput),
    files: z.array(FormFile).min(1).max(CHECK_FILES_AT_MOST),
  })
  .check(({ value, issues }) => {
    for (const code of partIssues(value))
      issues.push({ code: "custom", input: value, path: ["parts"], params: { code } });
  });
export type MicrophoneCheckForm = z.infer<typeof MicrophoneCheckForm>;

/** Octave bands off a meter at both microphones, typed in place of recordings. */
export const TypedCheckInput = CheckInput.omit({ parts: true, calibration: true })
  .extend({ bands: TypedMicrophones })
  .check(({ value, issues }) => {
    if ((value.bands.outsideOnDb === null) !== (value.bands.insideOnDb === null))
      issues.push({
        code: "custom",
        input: value,
        path: ["bands", value.bands.outsideOnDb === null ? "outsideOnDb" : "insideOnDb"],
        params: { code: "required" },
      });
  });
export type TypedCheckInput = z.infer<typeof TypedCheckInput>;
