import { z } from "zod";
import { DayFigures } from "./finding";

export const Verdict = z.enum(["under", "over", "cant-tell-yet", "not-assessed"]);
/** A day as it is expected, before or after the changes. */
export const Tried = z.object({
  verdict: Verdict,
  outsideDb: z.number().nullable(),
  atEarDb: z.number().nullable(),
  figures: DayFigures.omit({ resultId: true, origin: true }).nullable(),
  cannot: z
    .object({
      changeIndex: z.number(),
      why: z.enum(["not-enough-time", "not-in-the-day"]),
    })
    .nullable(),
});
export type Tried = z.infer<typeof Tried>;

export const PlanOutcome = z.object({
  workers: z.array(
    z.object({
      workerId: z.uuid(),
      workerName: z.string(),
      employeeNumber: z.string(),
      before: Tried,
      after: Tried,
    }),
  ),
});
export type PlanOutcome = z.infer<typeof PlanOutcome>;
