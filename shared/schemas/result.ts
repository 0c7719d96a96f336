import { z } from "zod";
import type { DayEvaluation, DayInput } from "../acoustics/types";
import { IsoDate } from "./common";
import { DayFigures } from "./finding";

export const DayParams = z.object({ id: z.uuid(), date: IsoDate });

export const ResultRef = z.object({
  id: z.uuid(),
  computedAt: z.string(),
  isCurrent: z.boolean(),
  governingRuleSet: z.string(),
  ruleSetVersion: z.number(),
  methodVersion: z.number(),
  /** What it came to, for one to be told from another. */
  figures: DayFigures.pick({
    outsideDb: true,
    atEarDb: true,
    whileWornDb: true,
    verdictOutside: true,
    verdictAtEar: true,
    word: true,
    governingCriteria: true,
  }),
});

/** A day with everything its working is drawn from; the working itself is built by the same engine where it is shown. */
export const ResultView = z.object({
  id: z.uuid(),
  worker: z.object({ id: z.uuid(), name: z.string(), employeeNumber: z.string() }),
  date: IsoDate,
  /** Of the day's site: times of what was done to it are told in it. */
  timeZone: z.string(),
  shifts: z.array(
    z.object({
      id: z.uuid(),
      localStart: z.string(),
      lengthMin: z.number(),
      revision: z.number(),
      authorName: z.string().nullable(),
      reason: z.string().nullable(),
    }),
  ),
  figures: DayFigures,
  origin: z.enum(["computed", "imported"]),
  computedAt: z.string(),
  isCurrent: z.boolean(),
  methodVersion: z.number(),
  governing: z.object({ key: z.string(), version: z.number() }),
  comparison: z.array(z.object({ key: z.string(), version: z.number() })),
  /** Null for an imported day: levels only. */
  input: z.custom<DayInput>().nullable(),
  evaluation: z.custom<DayEvaluation>().nullable(),
  sources: z.record(z.string(), z.object({ label: z.string(), note: z.string().nullable() })),
  findings: z.array(z.object({ id: z.uuid(), kind: z.string(), state: z.string() })),
  /** Where rounds saw it worn much more or less than the shift states; what it states counts. */
  wearingSeen: z.array(
    z.object({
      taskId: z.uuid(),
      taskName: z.string(),
      statedPct: z.number(),
      wornCount: z.number(),
      seenCount: z.number(),
      /** Who says so: rounds, the worker alone, or both. */
      from: z.enum(["rounds", "own-reports", "both"]),
    }),
  ),
  earlier: z.array(ResultRef),
});
export type ResultView = z.infer<typeof ResultView>;
