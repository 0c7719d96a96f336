import { z } from "zod";
import { PageQuery, pageOf } from "./common";
import { NoticeState } from "./notice";

/** Kinds of mail that come about people's exposure; the daily mail has a setting of its own. */
export const MAIL_KINDS = ["own-results", "own-limit", "crew-limit", "overdue"] as const;
export const MailKind = z.enum(MAIL_KINDS);
export type MailKind = z.infer<typeof MailKind>;

/** What its reader may do without: it stands on the own page all the same. */
export const OPTIONAL_MAILS: readonly MailKind[] = ["own-limit"];

export const MailChoiceInput = z.object({ off: z.array(MailKind).max(MAIL_KINDS.length) });
export type MailChoiceInput = z.infer<typeof MailChoiceInput>;

export const MailChoiceView = z.object({
  /** 0 before anything was chosen. */
  revision: z.number(),
  email: z.string().nullable(),
  /** Those that this person can get at all. */
  rows: z.array(
    z.object({
      kind: MailKind,
      isOn: z.boolean(),
      isOptional: z.boolean(),
      /** Of the rule that asks for it; null: it is the program's own, or the rules name none. */
      citation: z.string().nullable(),
    }),
  ),
});
export type MailChoiceView = z.infer<typeof MailChoiceView>;

/** What was sent to somebody, as it was sent. */
export const SentPage = pageOf(
  z.object({
    id: z.uuid(),
    /** When it was sent; written, where it went on paper or has not gone yet. */
    at: z.string(),
    /** Null: on paper. */
    state: NoticeState.nullable(),
    subject: z.string(),
    text: z.string(),
  }),
);
export type SentPage = z.infer<typeof SentPage>;
export const SentFilter = PageQuery;
