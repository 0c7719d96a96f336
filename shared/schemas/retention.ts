import { z } from "zod";
import { RETENTION_KINDS } from "../rule-sets/retention";
import { AtSiteQuery, Can, PageQuery, pageOf, Reason } from "./common";

/** The organization's own term: it counts beside those of rules, and where a rule sets none. */
export const TermInput = z.object({
  /** Null: none is set. */
  yearsAfterLeaving: z.number().int().min(0).max(100).nullable(),
});
export type TermInput = z.infer<typeof TermInput>;

export const PeriodView = z.object({
  ruleSetKey: z.string(),
  kind: z.enum(RETENTION_KINDS),
  counts: z.enum(["from-record", "from-leaving"]),
  months: z.number().nullable(),
  citation: z.string(),
  sourceStatus: z.enum(["read", "from-memory"]),
});
export type PeriodView = z.infer<typeof PeriodView>;

/** Why somebody who left is not erased yet. */
export const KEPT_BECAUSE = [
  "held",
  "no-term",
  "not-due",
  "open-finding",
  "other-role",
  "employed",
  "withdrawn",
] as const;
export type KeptBecause = (typeof KEPT_BECAUSE)[number];

export const TermView = TermInput.extend({
  /** 0 before any was set. */
  revision: z.number(),
  /** Rule sets that apply at the sites and the terms that they set; one without any stands by its key alone. */
  ruleSetKeys: z.array(z.string()),
  periods: z.array(PeriodView),
  /** People who left and are in the records by name. */
  counts: z.object({ due: z.number(), proposed: z.number(), kept: z.number() }),
  can: Can("change"),
});
export type TermView = z.infer<typeof TermView>;

export const RetentionFilter = PageQuery.extend({
  ...AtSiteQuery.shape,
  show: z.enum(["due", "kept"]).default("due"),
});
export type RetentionFilter = z.infer<typeof RetentionFilter>;

export const FormerWorker = z.object({
  id: z.uuid(),
  name: z.string(),
  employeeNumber: z.string(),
  siteId: z.uuid(),
  siteName: z.string(),
  leftOn: z.string(),
  /** The last day of the longest term; null: nobody can say. */
  keepUntil: z.string().nullable(),
  /** Whose term that is: a rule's, or null for the organization's own. */
  ruleSetKey: z.string().nullable(),
  citation: z.string().nullable(),
  sourceStatus: z.enum(["read", "from-memory"]).nullable(),
  /** Null: due. */
  keptBecause: z.enum(KEPT_BECAUSE).nullable(),
  isProposed: z.boolean(),
  /** What is there of the person. */
  records: z.object({ letters: z.number(), notes: z.number(), files: z.number() }),
});
export type FormerWorker = z.infer<typeof FormerWorker>;
export const FormerWorkerPage = pageOf(FormerWorker);

export const HoldInput = z.object({
  siteId: z.uuid(),
  /** Null: everybody of the site. */
  workerId: z.uuid().nullable().default(null),
  reason: Reason,
});
export type HoldInput = z.infer<typeof HoldInput>;
export const LiftInput = z.object({ reason: Reason });

export const HoldView = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  siteName: z.string(),
  worker: z.object({ id: z.uuid(), name: z.string() }).nullable(),
  reason: z.string(),
  placedBy: z.string(),
  placedAt: z.string(),
  lifted: z.object({ by: z.string(), at: z.string(), reason: z.string() }).nullable(),
  revision: z.number(),
  can: Can("lift"),
});
export type HoldView = z.infer<typeof HoldView>;
export const HoldList = z.object({ rows: z.array(HoldView) });

export const ErasureInput = z.object({
  siteId: z.uuid(),
  workerIds: z.array(z.uuid()).min(1).max(500),
});
export type ErasureInput = z.infer<typeof ErasureInput>;

/** What one person proposes for a site and another decides, and how far it is. */
export const ProposalView = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  siteName: z.string(),
  state: z.enum(["proposed", "approved", "done", "withdrawn"]),
  proposedBy: z.string(),
  proposedAt: z.string(),
  approvedBy: z.string().nullable(),
  approvedAt: z.string().nullable(),
  withdrawnBy: z.string().nullable(),
  revision: z.number(),
});

export const ErasureView = ProposalView.extend({
  doneAt: z.string().nullable(),
  waiting: z.number(),
  erased: z.number(),
  /** Left as they are after all, by why. */
  kept: z.array(z.object({ because: z.enum(KEPT_BECAUSE), count: z.number() })),
  /** As they stand in the records now. */
  people: z.array(z.object({ id: z.uuid(), name: z.string(), keepUntil: z.string() })),
  can: Can("approve", "withdraw"),
});
export type ErasureView = z.infer<typeof ErasureView>;
export const ErasureList = z.object({ rows: z.array(ErasureView) });
