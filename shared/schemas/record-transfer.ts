import { z } from "zod";
import { SUCCESSION_KINDS } from "../rule-sets/retention";
import { Can, IsoDate, Name } from "./common";
import { ProposalView } from "./retention";

/** Programs write it with spaces or in capitals. */
export const Sha256Text = z
  .string()
  .overwrite((text) => text.replace(/\s+/g, "").toLowerCase())
  .refine((text) => /^[0-9a-f]{64}$/.test(text), { params: { code: "not-sha256" } });

export const RecordTransferInput = z.object({
  siteId: z.uuid(),
  /** The employer that follows. */
  successor: Name(200),
  /** The day on which the site ends here or passes on. */
  passesOn: IsoDate,
  note: z.string().trim().max(2000).default(""),
});
export type RecordTransferInput = z.infer<typeof RecordTransferInput>;

export const RecordReceiptInput = z.object({
  /** As the successor counted it over the file that they hold. */
  sha256: Sha256Text,
  /** Who signs for the successor. */
  signedBy: Name(200),
  signedOn: IsoDate,
});
export type RecordReceiptInput = z.infer<typeof RecordReceiptInput>;

export const RecordTransferView = ProposalView.extend({
  successor: z.string(),
  passesOn: z.string(),
  note: z.string(),
  /** Files that went out whole, the latest first. Their hashes are not told: the successor counts their own. */
  files: z.array(
    z.object({
      takenBy: z.string(),
      takenAt: z.string(),
      sizeBytes: z.number(),
      years: z.array(z.number()),
    }),
  ),
  receipt: RecordReceiptInput.extend({ recordedBy: z.string(), recordedAt: z.string() }).nullable(),
  can: Can("approve", "withdraw", "take", "receive"),
});
export type RecordTransferView = z.infer<typeof RecordTransferView>;

export const SuccessionDutyView = z.object({
  ruleSetKey: z.string(),
  kind: z.enum(SUCCESSION_KINDS),
  monthsBefore: z.number().nullable(),
  citation: z.string(),
  sourceStatus: z.enum(["read", "from-memory"]),
});
export type SuccessionDutyView = z.infer<typeof SuccessionDutyView>;

export const RecordTransferList = z.object({
  rows: z.array(RecordTransferView),
  /** What rules at the sites say of it. */
  duties: z.array(SuccessionDutyView),
});
export type RecordTransferList = z.infer<typeof RecordTransferList>;
