import { z } from "zod";
import { Can, IsoDate, Name, PageQuery, pageOf, Reason } from "./common";
import { ReadingFacts, Settings } from "./evaluation";

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
  revision: z.number(),
  can: Can("change"),
});
export type InstrumentView = z.infer<typeof InstrumentView>;
export const InstrumentList = z.object({ rows: z.array(InstrumentView) });

/** Field checks may drift by this much (ISO 9612) before a run is discarded or kept with a reason. */
export const FIELD_CHECK_TOLERANCE_DB = 0.5;

const Facts = z.object({
  durationMin: z.number().positive().max(1440),
  checkBeforeDb: z.number().min(70).max(130).nullable().default(null),
  checkAfterDb: z.number().min(70).max(130).nullable().default(null),
  covers: z.enum(["shift", "projected", "part"]),
  /** Why the officer keeps a run whose field checks drifted too far. */
  keptReason: Reason.nullable().default(null),
  unusual: z.string().trim().max(10_000).nullable().default(null),
  readings: z.array(ReadingFacts).min(1).max(12),
});

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
  if (checkBeforeDb !== null && checkAfterDb !== null) {
    const driftDb = Math.abs(checkAfterDb - checkBeforeDb);
    if (driftDb > FIELD_CHECK_TOLERANCE_DB + 1e-9 && keptReason === null)
      add(["keptReason"], "field-check-drift", { driftDb });
  }
  readings.forEach((reading, index) => {
    const { dosePct, averageDb, lceqDb, lasMaxDb, peak } = reading;
    if ([dosePct, averageDb, lceqDb, lasMaxDb, peak].every((value) => value === null))
      add(["readings", index, "averageDb"], "reading-empty");
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
  reason: Reason,
  isVoid: z.boolean().default(false),
}).check((context) => plausible(context as unknown as Issues));
export type RunCorrection = z.infer<typeof RunCorrection>;

export const RunView = Facts.extend({
  id: z.uuid(),
  siteId: z.uuid(),
  instrumentId: z.uuid(),
  instrumentName: z.string(),
  serialNumber: z.string(),
  workerId: z.uuid().nullable(),
  workerName: z.string().nullable(),
  date: IsoDate,
  shiftId: z.uuid().nullable(),
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
});
