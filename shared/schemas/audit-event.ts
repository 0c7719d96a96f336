import { z } from "zod";
import { PageQuery, pageOf } from "./common";

export const AuditEventFilter = PageQuery.extend({
  subjectKind: z.string().min(1).max(40).optional(),
  subjectId: z.uuid().optional(),
  actorId: z.uuid().optional(),
});
export type AuditEventFilter = z.infer<typeof AuditEventFilter>;

/** Who changed what, and when. */
export const AuditEventView = z.object({
  id: z.string(),
  at: z.string(),
  /** Null: the program itself. */
  actorId: z.uuid().nullable(),
  actorName: z.string().nullable(),
  action: z.string(),
  subjectKind: z.string(),
  subjectId: z.uuid().nullable(),
  /** Of the site that the event concerns; null where it concerns none. */
  timeZone: z.string().nullable(),
  /** Null once the personal values have been erased; the event itself stays. */
  values: z.record(z.string(), z.unknown()).nullable(),
  isSealed: z.boolean(),
});
export type AuditEventView = z.infer<typeof AuditEventView>;
/** What an id in the trail stands for. Only what the reader may see is named. */
export const NamedThing = z.object({
  id: z.uuid(),
  kind: z.string(),
  /** Its own name, or that of the worker or thing that it is about. */
  name: z.string().nullable(),
  date: z.iso.date().nullable(),
  /** Kind of a finding. */
  code: z.string().nullable(),
});
export type NamedThing = z.infer<typeof NamedThing>;
export const AuditEventPage = pageOf(AuditEventView).extend({ names: z.array(NamedThing) });
