import { z } from "zod";
import {
  AtSiteQuery,
  Can,
  EmployeeNumber,
  IsoDate,
  Name,
  PageQuery,
  pageOf,
  Reason,
} from "./common";

const TrainingFacts = z.object({
  siteId: z.uuid(),
  heldOn: IsoDate,
  title: Name(200),
  durationMin: z.number().positive().max(1440),
  fileId: z.uuid().nullable().default(null),
});

/** A training that was held, with who was there. */
export const TrainingInput = TrainingFacts.extend({
  employeeNumbers: z.array(EmployeeNumber).min(1).max(1000),
});
export type TrainingInput = z.infer<typeof TrainingInput>;

export const TrainingStrike = z.object({ reason: Reason });

export const TrainingRow = TrainingFacts.extend({
  id: z.uuid(),
  siteName: z.string(),
  fileName: z.string().nullable(),
  attendees: z.number(),
  struckReason: z.string().nullable(),
  authorName: z.string().nullable(),
  revision: z.number(),
  can: Can("change"),
});
export type TrainingRow = z.infer<typeof TrainingRow>;
export const TrainingPage = pageOf(TrainingRow);

export const TrainingView = TrainingRow.extend({
  attendance: z.array(z.object({ id: z.uuid(), name: z.string(), employeeNumber: z.string() })),
});
export type TrainingView = z.infer<typeof TrainingView>;

export const TrainingFilter = PageQuery.extend(AtSiteQuery.shape);

/** When a worker is to be trained, by the rules of the site. */
export const TrainingDue = z.object({
  workerId: z.uuid(),
  workerName: z.string(),
  employeeNumber: z.string(),
  siteId: z.uuid(),
  siteName: z.string(),
  ruleSetKey: z.string(),
  /** The first day within a year on which the worker was over what the duty hangs from. */
  exposedOn: IsoDate,
  trainedOn: IsoDate.nullable(),
  dueOn: IsoDate,
});
export type TrainingDue = z.infer<typeof TrainingDue>;
export const TrainingDuePage = pageOf(TrainingDue);

/** A worker's own trainings, the latest first, and when the next is due. */
export const WorkerTraining = z.object({
  rows: z.array(
    z.object({
      id: z.uuid(),
      heldOn: IsoDate,
      title: z.string(),
      durationMin: z.number(),
      fileId: z.uuid().nullable(),
      fileName: z.string().nullable(),
    }),
  ),
  due: z.object({ dueOn: IsoDate, ruleSetKey: z.string() }).nullable(),
});
export type WorkerTraining = z.infer<typeof WorkerTraining>;
