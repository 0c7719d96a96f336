import { z } from "zod";
import { Can, IsoDate, PageQuery, pageOf } from "./common";
import { NoticeState } from "./notice";

/**
 * How far a letter of results is: to be printed, on its way, sent, not deliverable, acknowledged; replaced by a later one,
 * or withdrawn before it left.
 */
export const LETTER_STATES = [
  "to-print",
  "waiting",
  "sent",
  "failed",
  "acknowledged",
  "replaced",
  "withdrawn",
] as const;
export const LetterState = z.enum(LETTER_STATES);
export type LetterState = z.infer<typeof LetterState>;

export const LetterRow = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  worker: z.object({ id: z.uuid(), name: z.string(), employeeNumber: z.string() }),
  state: LetterState,
  /** By mail, the state of its notice; null: on paper. */
  noticeState: NoticeState.nullable(),
  days: z.array(z.object({ date: IsoDate, levelDb: z.number().nullable(), isOver: z.boolean() })),
  dueOn: IsoDate,
  /** Due and not with the worker yet. */
  isLate: z.boolean(),
  writtenAt: z.string(),
  sentAt: z.string().nullable(),
  acknowledged: z
    .object({
      way: z.enum(["link", "paper"]),
      at: z.string(),
      signedOn: IsoDate.nullable(),
      recordedBy: z.string().nullable(),
    })
    .nullable(),
  can: Can("acknowledge"),
});
export type LetterRow = z.infer<typeof LetterRow>;
export const LetterPage = pageOf(LetterRow);

export const LetterView = LetterRow.extend({
  language: z.string(),
  subject: z.string(),
  text: z.string(),
  /** On paper, in the language of the letter: where it comes from, and the line above the signature. */
  paper: z.object({ from: z.string(), signature: z.string() }),
  replacesId: z.uuid().nullable(),
  replacedById: z.uuid().nullable(),
  ruleSetKey: z.string(),
  ruleSetVersion: z.number(),
});
export type LetterView = z.infer<typeof LetterView>;

export const LetterFilter = PageQuery.extend({
  show: z.enum(["open", "acknowledged", "all"]).default("open"),
  siteId: z.uuid().optional(),
});

/** The date beside the signature on the printed letter. */
export const PaperAcknowledgement = z.object({ signedOn: IsoDate });

/** What whoever opens a letter's link is shown; the letter itself only while it waits to be acknowledged. */
export const OpenedLetter = z.object({
  state: z.enum(["open", "acknowledged", "expired"]),
  language: z.string(),
  from: z.string(),
  subject: z.string().nullable(),
  text: z.string().nullable(),
  /** Null: not yet. */
  acknowledgedOn: IsoDate.nullable(),
});
export type OpenedLetter = z.infer<typeof OpenedLetter>;
