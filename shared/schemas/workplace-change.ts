import { z } from "zod";
import { Can, IsoDate, PageQuery, pageOf, Reason } from "./common";

/** A change to process, machine, control or pattern of work: it re-opens monitoring, and the protectors chosen on it. */
export const WorkplaceChangeInput = z
  .object({
    siteId: z.uuid(),
    areaId: z.uuid().nullable().default(null),
    taskId: z.uuid().nullable().default(null),
    jobId: z.uuid().nullable().default(null),
    kind: z.enum(["process", "machine", "control", "work-pattern"]),
    happenedOn: IsoDate,
    what: Reason,
  })
  .refine(({ areaId, taskId, jobId }) => [areaId, taskId, jobId].filter(Boolean).length === 1, {
    path: ["taskId"],
    params: { code: "one-of-area-task-job" },
  });
export type WorkplaceChangeInput = z.infer<typeof WorkplaceChangeInput>;

export const WorkplaceChangeStrike = z.object({ reason: Reason });

export const WorkplaceChangeView = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  areaId: z.uuid().nullable(),
  taskId: z.uuid().nullable(),
  jobId: z.uuid().nullable(),
  /** Name of the area, task or job. */
  subjectName: z.string(),
  kind: z.enum(["process", "machine", "control", "work-pattern"]),
  happenedOn: IsoDate,
  what: z.string(),
  struckReason: z.string().nullable(),
  authorName: z.string().nullable(),
  createdAt: z.string(),
  revision: z.number(),
  can: Can("change"),
});
export type WorkplaceChangeView = z.infer<typeof WorkplaceChangeView>;
/** Changes after which protectors in use wait for another look. */
export const ProtectorsToReview = z.array(
  z.object({
    changeId: z.uuid(),
    siteId: z.uuid(),
    subjectName: z.string(),
    kind: z.string(),
    what: z.string(),
    happenedOn: IsoDate,
    assignmentsCount: z.number(),
  }),
);
export type ProtectorsToReview = z.infer<typeof ProtectorsToReview>;
/** Protectors chosen before a change, at which nobody has looked since. */
export const ChosenBefore = z.object({
  change: WorkplaceChangeView,
  rows: z.array(
    z.object({
      id: z.uuid(),
      workerId: z.uuid(),
      workerName: z.string(),
      employeeNumber: z.string(),
      /** Task or area that it is for; null: everywhere. */
      useName: z.string().nullable(),
      innerName: z.string(),
      outerName: z.string().nullable(),
      fromDate: IsoDate,
    }),
  ),
});
export type ChosenBefore = z.infer<typeof ChosenBefore>;
export const ProtectorsLookedAt = z.object({ assignmentIds: z.array(z.uuid()).min(1).max(2000) });

export const WorkplaceChangePage = pageOf(WorkplaceChangeView);
export const WorkplaceChangeFilter = PageQuery.extend({ siteId: z.uuid().optional() });
