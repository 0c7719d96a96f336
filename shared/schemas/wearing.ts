import { z } from "zod";
import { Can, IsoDate, PageQuery, pageOf, Reason } from "./common";

export const WearingLook = z
  .object({
    workerId: z.uuid(),
    taskId: z.uuid(),
    wornCount: z.number().int().min(0).max(1000),
    seenCount: z.number().int().min(1).max(1000),
  })
  .refine(({ wornCount, seenCount }) => wornCount <= seenCount, {
    path: ["wornCount"],
    params: { code: "more-worn-than-seen" },
  });
/** A round through the shop, or what somebody says of themselves. */
export const WearingRoundInput = z.object({
  siteId: z.uuid(),
  seenOn: IsoDate,
  source: z.enum(["round", "own-report"]).default("round"),
  note: z.string().trim().max(2000).default(""),
  looks: z.array(WearingLook).min(1).max(400),
});
export type WearingRoundInput = z.infer<typeof WearingRoundInput>;
export const WearingRoundStrike = z.object({ reason: Reason });
export const WearingRoundView = z.object({
  id: z.uuid(),
  revision: z.number(),
  siteId: z.uuid(),
  siteName: z.string(),
  seenOn: IsoDate,
  source: z.enum(["round", "own-report"]),
  note: z.string(),
  authorName: z.string().nullable(),
  struckReason: z.string().nullable(),
  wornCount: z.number(),
  seenCount: z.number(),
  looks: z.array(
    z.object({
      workerId: z.uuid(),
      workerName: z.string(),
      taskId: z.uuid(),
      taskName: z.string(),
      wornCount: z.number(),
      seenCount: z.number(),
      /** Followed by another own report of the same worker, task and day: it counts nowhere. */
      isReplaced: z.boolean(),
    }),
  ),
  can: Can("strike"),
});
export type WearingRoundView = z.infer<typeof WearingRoundView>;
export const WearingRoundPage = pageOf(WearingRoundView);
export const WearingFilter = PageQuery.extend({ siteId: z.uuid().optional() });

/** For so many days after it was first said, a worker may say it anew. Common practice, no source. */
export const OWN_REPORT_CHANGE_DAYS = 14;
export const OwnReportsFilter = z.object({ from: IsoDate });
/** What somebody said of their own wearing, the latest of each day and task, the latest day first. */
export const OwnReports = z.object({
  rows: z.array(
    z.object({
      date: IsoDate,
      taskId: z.uuid(),
      taskName: z.string(),
      wornCount: z.number(),
      seenCount: z.number(),
      /** Share worn as the day's shifts state it, percent of the task's time: it counts, and not the report. Null: no shift states it. */
      statedPct: z.number().nullable(),
      note: z.string(),
      saidOn: IsoDate,
      /** Entered by the worker, and not by somebody whom they told. */
      isByWorker: z.boolean(),
      /** The last day on which the worker may say it anew. */
      changeableUntil: IsoDate,
      canChange: z.boolean(),
    }),
  ),
});
export type OwnReports = z.infer<typeof OwnReports>;

/** Who is to be looked at in a round: the crew of a date with their tasks in noise. */
export const WearingTally = z.object({
  crewId: z.uuid(),
  crewName: z.string(),
  siteId: z.uuid(),
  date: IsoDate,
  tasks: z.array(z.object({ id: z.uuid(), name: z.string() })),
  workers: z.array(
    z.object({
      id: z.uuid(),
      name: z.string(),
      employeeNumber: z.string(),
      taskIds: z.array(z.uuid()),
      /** What is assigned for a task: its own before its area's, and that before the one for everywhere. */
      protectors: z.array(z.object({ taskId: z.uuid(), name: z.string() })),
    }),
  ),
});
export type WearingTally = z.infer<typeof WearingTally>;

/** Crews through which somebody may make a round on a date. */
export const WearingCrews = z.object({
  rows: z.array(
    z.object({ id: z.uuid(), name: z.string(), siteId: z.uuid(), siteName: z.string() }),
  ),
});
export type WearingCrews = z.infer<typeof WearingCrews>;
