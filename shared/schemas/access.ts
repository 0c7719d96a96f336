import { z } from "zod";
import { PageQuery, pageOf } from "./common";
import { SessionRole } from "./session";

/** The part of somebody's record that was read. */
export const ReadKind = z.enum([
  "page",
  "history",
  "result",
  "shift",
  "run",
  "fits",
  "training",
  "finding",
  "letter",
  "export",
]);
export type ReadKind = z.infer<typeof ReadKind>;

/** One person who may read, and by which grant. */
export const ReaderView = z.object({
  userId: z.uuid(),
  name: z.string(),
  role: SessionRole,
  /** Null: at all sites. */
  siteName: z.string().nullable(),
  /** A supervisor's, of which the worker is today. */
  crewName: z.string().nullable(),
  /** Of somebody of an outside employer. */
  employerName: z.string().nullable(),
  /** A visitor's. */
  year: z.number().nullable(),
  endsAt: z.string().nullable(),
  timeZone: z.string().nullable(),
});
export type ReaderView = z.infer<typeof ReaderView>;

export const WorkerReaders = z.object({ rows: z.array(ReaderView) });

/** Who sees what of oneself: the account, which everybody has, and the record of whoever is a worker. */
export const OwnAccess = z.object({
  account: z.array(ReaderView),
  record: z.array(ReaderView).nullable(),
});
export type OwnAccess = z.infer<typeof OwnAccess>;

export const ReadFilter = PageQuery.extend({
  workerId: z.uuid().optional(),
  readerId: z.uuid().optional(),
});

export const ReadRow = z.object({
  id: z.uuid(),
  readerId: z.uuid(),
  readerName: z.string(),
  workerId: z.uuid().nullable(),
  workerName: z.string().nullable(),
  siteName: z.string(),
  timeZone: z.string(),
  year: z.number().nullable(),
  kind: ReadKind,
  /** By the site's clock. */
  readOn: z.string(),
  firstAt: z.string(),
});
export type ReadRow = z.infer<typeof ReadRow>;
export const ReadPage = pageOf(ReadRow);
