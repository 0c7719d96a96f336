import { z } from "zod";

export const NoticeState = z.enum([
  "waiting",
  "held",
  "sending",
  "sent",
  "possibly-sent",
  "failed",
  "withdrawn",
  /** Taken by the mail server and come back. */
  "bounced",
  /** Told by hand, on paper or in person. */
  "on-paper",
]);
export type NoticeState = z.infer<typeof NoticeState>;

export const NoticeAction = z.enum(["hold", "send-now", "send-again", "give-on-paper"]);
export type NoticeAction = z.infer<typeof NoticeAction>;

export const NoticeRow = z.object({
  id: z.uuid(),
  entryId: z.uuid(),
  recipientName: z.string(),
  audience: z.enum(["officer", "supervisor", "worker"]),
  state: NoticeState,
  notBefore: z.string(),
  sentAt: z.string().nullable(),
  tries: z.number(),
  lastError: z.string().nullable(),
  replacesId: z.uuid().nullable(),
  workers: z.array(
    z.object({ id: z.uuid(), name: z.string(), date: z.string(), kinds: z.array(z.string()) }),
  ),
  revision: z.number(),
});
export type NoticeRow = z.infer<typeof NoticeRow>;

/** Everybody who will be told because of one saving. */
export const EntryNotices = z.object({
  entryId: z.uuid(),
  notBefore: z.string().nullable(),
  state: z.enum(["none", "waiting", "held", "sent", "part"]),
  people: z.number(),
  notices: z.array(NoticeRow),
  /** When a later entry's notice that replaces one of these last left; null: none has. */
  correctedAt: z.string().nullable(),
});
export type EntryNotices = z.infer<typeof EntryNotices>;

/** How a notice reads: as it was sent, or as it would be now. */
export const NoticeText = z.object({
  subject: z.string(),
  text: z.string(),
  html: z.string(),
  isSent: z.boolean(),
});
