import { z } from "zod";

/** The last seal of an organization's chain: whoever keeps its number and hash elsewhere holds the whole chain by it. */
export const TrailHead = z.object({
  number: z.int(),
  /** SHA-256, hex. */
  hash: z.string(),
  sealedAt: z.string(),
});
export type TrailHead = z.infer<typeof TrailHead>;

/** Changes that another database role made with the triggers on, in a transaction without an event. */
export const ForeignChange = z.object({
  roleName: z.string(),
  table: z.string(),
  operation: z.enum(["insert", "update", "delete"]),
  rows: z.int(),
  firstAt: z.string(),
  lastAt: z.string(),
  /** A few of the rows' keys. */
  keys: z.array(z.string()),
});
export type ForeignChange = z.infer<typeof ForeignChange>;

/** What there is to check, and what has no seal yet. */
export const TrailState = z.object({
  head: TrailHead.nullable(),
  /** Written and not sealed yet: nobody would notice a change to these in the chain. */
  tail: z.object({ events: z.int(), entries: z.int(), since: z.string().nullable() }),
  tables: z.array(z.string()),
  /** Tables whose changes no trigger records, though it should. */
  unwatched: z.array(z.string()),
  foreign: z.array(ForeignChange),
  /** Where rows were taken as they stood: at the beginning, and after a change of the schema. */
  stated: z.array(z.object({ at: z.string(), roleName: z.string(), rows: z.int() })),
});
export type TrailState = z.infer<typeof TrailState>;

export const SealFaultKind = z.enum([
  "seal-missing",
  "event-missing",
  "entry-missing",
  "seal-broken",
  "values-changed",
  "values-removed",
]);
export type SealFaultKind = z.infer<typeof SealFaultKind>;

export const SealFault = z.object({
  kind: SealFaultKind,
  /** Of the seal; where several are missing, of the first. */
  number: z.int(),
  /** How many follow without a gap; only of missing seals more than 1. */
  count: z.int(),
  event: z
    .object({
      id: z.string(),
      at: z.string(),
      action: z.string(),
      subjectKind: z.string(),
      subjectId: z.string().nullable(),
    })
    .nullable(),
  /** Of an entry on rows. */
  table: z.string().nullable(),
});
export type SealFault = z.infer<typeof SealFault>;

export const SealsQuery = z.object({
  /** The last seal that was checked before; 0: from the beginning. */
  after: z.coerce.number().int().min(0).max(Number.MAX_SAFE_INTEGER).default(0),
});

export const SealsChecked = z.object({
  checked: z.int(),
  /** Where to go on; null: the chain is through. */
  next: z.int().nullable(),
  /** Events whose personal values are gone; the events themselves verify. */
  erased: z.int(),
  faults: z.array(SealFault),
});
export type SealsChecked = z.infer<typeof SealsChecked>;

export const RowFaultKind = z.enum(["row-changed", "row-inserted", "row-removed"]);
export type RowFaultKind = z.infer<typeof RowFaultKind>;

export const RowsParams = z.object({ table: z.string().regex(/^[a-z_]{1,63}$/) });

export const RowsChecked = z.object({
  table: z.string(),
  rows: z.int(),
  faultCount: z.int(),
  /** The first of them. */
  faults: z.array(z.object({ kind: RowFaultKind, key: z.string() })),
});
export type RowsChecked = z.infer<typeof RowsChecked>;
