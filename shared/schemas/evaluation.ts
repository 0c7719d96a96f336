import { z } from "zod";
import type {
  ActivePart,
  BandAttenuation,
  DayInput,
  LeftOut,
  LevelMetric,
  MeterSettings,
  OctaveBandValues,
  Protection,
  ProtectorData,
  ReadingInput,
  ShiftInput,
  TaskLevel,
  TimedTask,
} from "../acoustics/types";
import { US_LABEL_HZ } from "../acoustics/types";
import { IsoDate, LevelDb } from "./common";

const db = z.number().min(-40).max(200);

/** Holds a schema to the engine's own type, so that the two can't drift apart. */
const as =
  <T>() =>
  <S extends z.ZodType<T>>(schema: S): S =>
    schema;

export const OctaveBands = as<OctaveBandValues>()(
  z.tuple([db.nullable(), db, db, db, db, db, db, db]),
);

export const Weighting = z.enum(["A", "C", "Z"]);
export const ProtectorKindName = z.enum([
  "earmuff",
  "helmet-earmuff",
  "foam-plug",
  "premoulded-plug",
  "custom-plug",
  "banded-plug",
  "level-dependent",
  "active-earmuff",
  "active-plug",
  "communication-headset",
]);

export const Settings = as<MeterSettings>()(
  z.object({
    criterionLevelDb: z.number().min(70).max(100),
    exchangeRateDb: z.union([z.literal(3), z.literal(4), z.literal(5)]),
    thresholdDb: z.number().min(60).max(100).nullable(),
    weighting: Weighting,
    response: z.enum(["slow", "fast", "none"]),
  }),
);

export const Metric = as<LevelMetric>()(
  z.discriminatedUnion("kind", [
    z.object({ kind: z.literal("laeq") }),
    z.object({ kind: z.literal("steady") }),
    z.object({ kind: z.literal("lavg"), settings: Settings }),
  ]),
);

export const Peak = z.object({ levelDb: z.number().min(40).max(200), weighting: Weighting });
export const GradeName = z.enum(["measured-worker", "measured-group", "task-level", "estimate"]);
export const InstrumentClassName = z.enum(["class-1-meter", "class-2-meter", "dosimeter"]);

/** The acoustic facts of a task level, as entered. */
export const TaskLevelFacts = z.object({
  metric: Metric,
  levelDb: LevelDb,
  lcMinusLaDb: z.number().min(-10).max(40).nullable().default(null),
  octaveBandsDb: OctaveBands.nullable().default(null),
  lasMaxDb: z.number().min(20).max(180).nullable().default(null),
  peak: Peak.nullable().default(null),
  samplesDb: z.array(LevelDb).max(200).default([]),
  instrument: InstrumentClassName.nullable().default(null),
  grade: GradeName,
  impulseType: z
    .union([z.literal(1), z.literal(2), z.literal(3)])
    .nullable()
    .default(null),
});

const Level = as<TaskLevel>()(
  z.object({
    revisionId: z.string().nullable().default(null),
    ...TaskLevelFacts.shape,
  }) as unknown as z.ZodType<TaskLevel>,
);

export const Attenuation = as<BandAttenuation>()(
  z.object({ meanDb: OctaveBands, sdDb: OctaveBands }),
);

/** No canceller is this late, s. */
const MOST_DELAY_S = 0.1;
const MOST_BATTERY_MIN = 10_000;

export const Active = as<ActivePart>()(
  z.object({
    attenuationDb: OctaveBands.nullable(),
    // The limit has a text of its own, for screens show the delay in µs.
    delayS: z
      .number()
      .min(0)
      .refine((delayS) => delayS <= MOST_DELAY_S, { params: { code: "delay-too-long" } })
      .nullable(),
    gain: z.number().min(0).max(2).nullable(),
    maximumDb: z.number().min(0).max(60).nullable(),
    bandwidthHz: z.number().min(50).max(16_000).nullable(),
    saturatesAboveDb: z.number().min(60).max(140).nullable(),
    // It is typed in hours.
    batteryMin: z
      .number()
      .min(0)
      .refine((batteryMin) => batteryMin <= MOST_BATTERY_MIN, {
        params: { code: "battery-too-long" },
      })
      .nullable(),
  }),
);

const rating = z.number().min(0).max(60).nullable();

const nine = z.array(z.number().min(-20).max(80)).length(US_LABEL_HZ.length);

/** What the certificate and the test reports say of a model. */
export const ProtectorFacts = z.object({
  usRatingDb: rating.default(null),
  snrDb: rating.default(null),
  hDb: rating.default(null),
  mDb: rating.default(null),
  lDb: rating.default(null),
  slc80Db: rating.default(null),
  bands: Attenuation.nullable().default(null),
  active: Active.nullable().default(null),
  percentile: z
    .object({ mostDb: z.number().min(0).max(60), fewDb: z.number().min(0).max(60) })
    .nullable()
    .default(null),
  usLabel: z.object({ meanDb: nine, sdDb: nine }).nullable().default(null),
  /** By test subject; two or more. */
  subjectsDb: z
    .array(OctaveBands)
    .max(40)
    .refine((subjects) => subjects.length >= 2, {
      params: { code: "subjects-too-few" },
      // Also beside faults of a line: all that is wrong is said at once.
      when: ({ value }) => Array.isArray(value),
    })
    .nullable()
    .default(null),
});
export type ProtectorFacts = z.infer<typeof ProtectorFacts>;

const Protector = z.object({
  modelId: z.string().default(""),
  revisionId: z.string().nullable().default(null),
  name: z.string().max(120),
  kind: ProtectorKindName,
  ...ProtectorFacts.shape,
}) as unknown as z.ZodType<ProtectorData>;

const ProtectionInput = z.object({
  assignmentId: z.string().nullable().default(null),
  inner: Protector,
  outer: Protector.nullable().default(null),
  combinationBands: Attenuation.nullable().default(null),
  ownFitDb: z.number().min(0).max(60).nullable().default(null),
  activeCheckPassed: z.boolean().default(false),
  audioDb: z.number().min(20).max(120).nullable().default(null),
}) as unknown as z.ZodType<Protection>;

const Timed = z.object({
  id: z.string(),
  taskId: z.string().default(""),
  name: z.string().max(120),
  durationMin: z.number().positive().max(1440),
  level: Level.nullable(),
  zone: z.enum(["none", "single", "double"]).default("none"),
  protection: ProtectionInput.nullable().default(null),
  wornPct: z.number().min(0).max(100).nullable().default(null),
  wornIsShiftWide: z.boolean().default(false),
}) as unknown as z.ZodType<TimedTask>;

export const ReadingFacts = z.object({
  settings: Settings,
  dosePct: z.number().min(0).max(1_000_000).nullable().default(null),
  averageDb: LevelDb.nullable().default(null),
  lceqDb: z.number().min(20).max(180).nullable().default(null),
  lasMaxDb: z.number().min(20).max(180).nullable().default(null),
  peak: Peak.nullable().default(null),
});
export type ReadingFacts = z.infer<typeof ReadingFacts>;

export const UnaccountedInput = z.discriminatedUnion("how", [
  z.object({ how: z.literal("unknown") }),
  z.object({ how: z.literal("like-the-rest") }),
  z.object({ how: z.literal("quiet"), levelDb: LevelDb }),
]);

const minutes = z.number().positive().max(1440);
/** Time within a run that its reading leaves out. */
export const LeftOutInput = as<LeftOut>()(
  z.discriminatedUnion("how", [
    z.object({ how: z.literal("unknown"), minutes }),
    z.object({ how: z.literal("like-the-rest"), minutes }),
    z.object({ how: z.literal("quiet"), levelDb: LevelDb, minutes }),
  ]),
);

const Reading = z.object({
  id: z.string(),
  runId: z.string().default(""),
  durationMin: z.number().positive().max(1440),
  leftOut: LeftOutInput.optional(),
  covers: z.enum(["shift", "projected", "part"]),
  instrument: InstrumentClassName.default("dosimeter"),
  keptReason: z.string().nullable().default(null),
  ...ReadingFacts.shape,
}) as unknown as z.ZodType<ReadingInput>;

const Shift = z
  .object({
    id: z.string(),
    revisionId: z.string().nullable().default(null),
    lengthMin: z.number().positive().max(1440),
    tasks: z.array(Timed).max(48),
    unaccounted: UnaccountedInput.default({ how: "unknown" }),
    readings: z.array(Reading).max(20).default([]),
  })
  .check((context) => {
    const sum = context.value.tasks.reduce((total, task) => total + task.durationMin, 0);
    if (sum > context.value.lengthMin + 1e-6) {
      context.issues.push({
        code: "custom",
        input: context.value,
        path: ["tasks"],
        params: {
          code: "tasks-longer-than-shift",
          sumMin: sum,
          lengthMin: context.value.lengthMin,
          overMin: sum - context.value.lengthMin,
        },
      });
    }
  }) as unknown as z.ZodType<ShiftInput>;

/** A worker's whole day, computed without being stored. */
export const EvaluateInput = z.object({
  day: z.object({
    workerId: z.string().default(""),
    date: IsoDate,
    shifts: z.array(Shift).min(1).max(6),
    site: z.object({
      wearFromDb: z.number().min(60).max(120).default(85),
      creditsActivePart: z.boolean().default(false),
      usesUncertainty: z.boolean().default(false),
    }),
    personalTargetDb: z.number().min(60).max(100).nullable().default(null),
    mustWear: z.boolean().default(false),
  }) as unknown as z.ZodType<DayInput>,
  governingRuleSet: z.string(),
  comparisonRuleSets: z.array(z.string()).max(12).default([]),
  withWorking: z.boolean().default(false),
});
export type EvaluateInput = z.output<typeof EvaluateInput>;

export const EvaluateView = z.object({ evaluation: z.unknown(), working: z.unknown().nullable() });
