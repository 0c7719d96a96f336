import { z } from "zod";
import { IsoDate, pageOf } from "./common";
import { FindingRow } from "./finding";

/** What stands on a crew's sheet at a hand-over, frozen as it was given. */
export const HandOverContent = z.object({
  sheetDate: IsoDate,
  /** Orders that are open, the sheet's own order. */
  orders: z.array(
    z.object({
      /** Null: the day ahead asks for it, and no finding is open on it. */
      findingId: z.uuid().nullable(),
      workerName: z.string(),
      kind: FindingRow.shape.kind,
      facts: z.record(z.string(), z.unknown()),
      cannot: FindingRow.shape.cannot,
    }),
  ),
  absent: z.array(z.object({ workerName: z.string(), untilDate: IsoDate.nullable() })),
  loans: z.array(
    z.object({
      workerName: z.string(),
      way: z.enum(["out", "in"]),
      crewName: z.string().nullable(),
      untilDate: IsoDate.nullable(),
    }),
  ),
});
export type HandOverContent = z.infer<typeof HandOverContent>;

export const HandOverDraft = z.object({
  crew: z.object({ id: z.uuid(), name: z.string(), timeZone: z.string() }),
  content: HandOverContent,
  /** Of the content: whoever gives it names what they saw. */
  fingerprint: z.string(),
  /** Supervisors of the crew now or soon, and the site's officers. */
  recipients: z.array(z.object({ id: z.uuid(), name: z.string() })),
});
export type HandOverDraft = z.infer<typeof HandOverDraft>;

export const HandOverInput = z.object({
  recipientId: z.uuid(),
  note: z.string().trim().max(4000).default(""),
  fingerprint: z.string().length(64),
});
export type HandOverInput = z.infer<typeof HandOverInput>;

export const HandOverView = z.object({
  id: z.uuid(),
  content: HandOverContent,
  note: z.string(),
  byName: z.string(),
  toName: z.string(),
  givenAt: z.string(),
  receivedAt: z.string().nullable(),
  /** It was given to whoever reads this, and is not acknowledged yet. */
  canReceive: z.boolean(),
});
export type HandOverView = z.infer<typeof HandOverView>;
export const HandOverPage = pageOf(HandOverView);
