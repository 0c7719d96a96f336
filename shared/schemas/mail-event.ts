import { z } from "zod";

/** What a mail provider reports of one mail, signed: see `server/lib/mail-hook.ts`. */
export const MailHookEvent = z.object({
  id: z.string().min(1).max(300),
  kind: z.enum(["bounced", "delayed", "delivered"]),
  /** The mail's Message-ID, as in its head. */
  messageId: z.string().min(3).max(400),
  /** RFC 3463, such as 5.1.1. */
  status: z
    .string()
    .regex(/^[245]\.\d{1,3}\.\d{1,3}$/)
    .nullish(),
  said: z.string().max(4000).nullish(),
});
export type MailHookEvent = z.infer<typeof MailHookEvent>;

/** Whether the mail is one of ours, and whether this was news. */
export const MailHookReply = z.object({ isKnown: z.boolean(), isNew: z.boolean() });
export type MailHookReply = z.infer<typeof MailHookReply>;
