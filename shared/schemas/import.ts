import { z } from "zod";
import { IsoDate, Reason } from "./common";
import { EntryNotices } from "./notice";

export const IMPORT_KINDS = ["shifts", "readings", "past-results"] as const;
export const ImportKind = z.enum(IMPORT_KINDS);
export type ImportKind = z.infer<typeof ImportKind>;

/** A file larger than this is refused before it is read whole. */
export const IMPORT_LIMIT_BYTES = 20 * 1024 * 1024;
export const IMPORT_LINES_LIMIT = 100_000;

export const ImportQuery = z.object({
  siteId: z.uuid(),
  /** Only says what would come of it. */
  dryRun: z.enum(["true", "false"]).default("false"),
});

export const ImportForm = z.object({
  file: z.object({ name: z.string().min(1).max(255), sizeBytes: z.number(), sha256: z.string() }),
  /** Needed where the file changes what is recorded already. */
  reason: Reason.nullable().default(null),
});

export const ImportIssue = z.object({
  /** In the file, the header being 1. */
  line: z.number(),
  /** Name of the column. */
  field: z.string(),
  code: z.string(),
  params: z.record(z.string(), z.union([z.string(), z.number()])).default({}),
});
export type ImportIssue = z.infer<typeof ImportIssue>;

export const ImportReport = z.object({
  kind: ImportKind,
  isDryRun: z.boolean(),
  fileName: z.string(),
  lines: z.number(),
  /** Shifts, runs or days, as the kind has it. */
  fresh: z.number(),
  changed: z.number(),
  unchanged: z.number(),
  workers: z.number(),
  firstDate: IsoDate.nullable(),
  lastDate: IsoDate.nullable(),
  /** The first of them. */
  issues: z.array(ImportIssue),
  issuesCount: z.number(),
  /** Null: nothing was stored. */
  entryId: z.uuid().nullable(),
  computedDays: z.number(),
  /** Computed later, by a job. */
  queuedDays: z.number(),
  notices: EntryNotices.nullable(),
});
export type ImportReport = z.infer<typeof ImportReport>;
