import { z } from "zod";
import type { AttenuationMethod, ProtectorWord } from "../acoustics/types";
import { Active, OctaveBands, ProtectorKindName } from "./evaluation";

/** A protector in one task's noise: alone or under another one, for anybody or for a worker with a fit of their own. */
export const AtEarQuery = z.object({
  taskId: z.uuid(),
  /** Worn over it. */
  outerId: z.uuid().optional(),
  workerId: z.uuid().optional(),
});
export type AtEarQuery = z.infer<typeof AtEarQuery>;

const Method = z.enum([
  "octave-band",
  "hml",
  "snr",
  "us-single-number",
  "percentile",
  "slc80",
  "own-fit",
]) satisfies z.ZodType<AttenuationMethod>;

const Word = z.enum([
  "too-little",
  "just-enough",
  "good",
  "strong-side",
  "too-much",
  "enough",
]) satisfies z.ZodType<ProtectorWord>;

/** One method in one of its ways; what is not its own is null. */
export const MethodRow = z.object({
  method: Method,
  protectedPct: z.number().nullable(),
  derating: z.enum(["none", "half", "by-type"]).nullable(),
  reachedBy: z.enum(["most", "few"]).nullable(),
  /** The outside level that its figure comes off: A-weighted, C-weighted, or band by band. */
  startsFrom: z.enum(["la", "lc", "bands"]),
  /** Without programme audio, active part off, dB(A). */
  atEarDb: z.number().nullable(),
  /** Taken off the outside level, before any clamp, dB. */
  reductionDb: z.number().nullable(),
  wasClamped: z.boolean(),
  reason: z.string().nullable(),
  isOfRule: z.boolean(),
  governs: z.boolean(),
});
export type MethodRow = z.infer<typeof MethodRow>;

/** The nominal day of a job with the protector worn throughout wherever one counts as worn. */
export const NominalDayAtEar = z.object({
  jobId: z.uuid(),
  jobName: z.string(),
  lengthMin: z.number(),
  wornMin: z.number(),
  atEarDb: z.number().nullable(),
  atEarBound: z.enum(["exact", "upper", "lower"]),
  /** Active part on throughout, and while the battery lasts; null: none, or not known. */
  atEarActiveDb: z.number().nullable(),
  atEarAsWorkedDb: z.number().nullable(),
  /** How loud a programme may be while it is worn before the day passes the limit, dB(A). */
  mostAudioDb: z.number().nullable(),
  audioReason: z.enum(["not-worn", "level-open", "past-limit", "no-limit"]).nullable(),
});
export type NominalDayAtEar = z.infer<typeof NominalDayAtEar>;

const Bands = OctaveBands.readonly();

export const AtEarView = z.object({
  task: z.object({ id: z.uuid(), name: z.string(), siteId: z.uuid(), siteName: z.string() }),
  /** In force today; null: nobody has told yet how loud it is, and no method says anything. */
  level: z
    .object({
      levelDb: z.number(),
      /** As stated, else of the spectrum. */
      lcMinusLaDb: z.number().nullable(),
      /** Unweighted. */
      octaveBandsDb: Bands.nullable(),
    })
    .nullable(),
  inner: z.object({
    modelId: z.uuid(),
    name: z.string(),
    kind: ProtectorKindName,
    bands: z.object({ meanDb: Bands, sdDb: Bands }).nullable(),
    active: z.object({ ...Active.shape, attenuationDb: Bands.nullable() }).nullable(),
  }),
  outer: z.object({ modelId: z.uuid(), name: z.string() }).nullable(),
  worker: z
    .object({
      id: z.uuid(),
      name: z.string(),
      /** The fit that counts today, dB; null: none, or two are worn. */
      ownFitDb: z.number().nullable(),
      /** Where Appendix B governs, the label’s US number less 7, dB: it stands beside an own fit. */
      labelLess7Db: z.number().nullable(),
      activeCheckPassed: z.boolean(),
      /** Of the assignment in force, dB(A). */
      audioDb: z.number().nullable(),
    })
    .nullable(),
  ruleSetKey: z.string(),
  ruleSetVersion: z.number(),
  creditsActivePart: z.boolean(),
  methods: z.array(MethodRow),
  /** Between the highest and the lowest of the methods as the rule computes them, dB. */
  spreadDb: z.number().nullable(),
  isSpreadLarge: z.boolean(),
  /** By the governing method while it is worn, active part off and on, without programme audio. */
  whileWorn: z.object({
    offDb: z.number().nullable(),
    onDb: z.number().nullable(),
    /** With the part off the most that it can be, where an average that left something out only bounds it; null: it is exact. */
    mostDb: z.number().nullable(),
    word: Word.nullable(),
    wordOn: Word.nullable(),
    reason: z.string().nullable(),
  }),
  /** What a day at the ear is held against: the rule's limit, or its target for protectors; null: it states none. */
  limit: z.object({ levelDb: z.number(), kind: z.enum(["limit", "target"]) }).nullable(),
  days: z.array(NominalDayAtEar),
});
export type AtEarView = z.infer<typeof AtEarView>;
