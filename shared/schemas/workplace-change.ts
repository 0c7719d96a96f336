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
export const WorkplaceChangePage = pageOf(WorkplaceChangeView);
export const WorkplaceChangeFilter = PageQuery.extend({ siteId: z.uuid().optional() });
