import type {
  ForeignChange,
  RowFaultKind,
  RowsChecked,
  SealFault,
  SealsChecked,
  TrailHead,
  TrailState,
} from "../../shared/schemas/trail-check";
import {
  chainHash,
  ENTRY_FACTS,
  type EntryFacts,
  EVENT_FACTS,
  type EventFacts,
  valuesDigest,
} from "../lib/audit";
import { row, rows } from "../lib/db";
import { notFound } from "../lib/errors";

/** Seals read at once. */
const SEALS_LIMIT = 10_000;
/** Faults named at most for one table, and keys for one change; the counts are of all. */
const FAULTS_LIMIT = 100;
const KEYS_LIMIT = 5;
const CHANGES_LIMIT = 100;

const iso = (column: string) =>
  `to_char(${column} AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.MS"Z"')`;

/** The last seal of the present organization's chain; null before the first. */
export async function trailHead(organizationId: string): Promise<TrailHead | null> {
  return row<TrailHead>(
    `SELECT number::int AS number, encode(hash, 'hex') AS hash, ${iso("sealed_at")} AS "sealedAt"
     FROM audit_seals WHERE organization_id = :organizationId ORDER BY number DESC LIMIT 1`,
    { organizationId },
  );
}

const NAMES = ["trail_insert", "trail_update", "trail_delete"];

/** What there is to check of an organization, what is not sealed, and what other database roles changed. */
export async function trailState(organizationId: string): Promise<TrailState> {
  const tail = await row<{ events: number; entries: number; since: string | null }>(
    `WITH open AS (
       SELECT 1 AS event, e.at FROM audit_events e LEFT JOIN audit_seals s ON s.event_id = e.id WHERE e.organization_id = :organizationId AND s.number IS NULL
       UNION ALL SELECT 0, n.at FROM trail_entries n LEFT JOIN audit_seals s ON s.entry_id = n.id WHERE n.organization_id = :organizationId AND s.number IS NULL)
     SELECT coalesce(sum(event), 0)::int AS events, (count(*) - coalesce(sum(event), 0))::int AS entries, ${iso("min(at)")} AS since FROM open`,
    { organizationId },
  );
  const tables = await rows<{ table: string; isWatched: boolean }>(
    `SELECT w.table_name AS table, (SELECT count(*) = 3 FROM pg_trigger t WHERE t.tgrelid = w.target AND t.tgname IN (:names) AND t.tgenabled IN ('O', 'A')) AS "isWatched"
     FROM watched_tables w ORDER BY 1`,
    { names: NAMES },
  );
  const foreign = await rows<ForeignChange>(
    `SELECT n.role_name AS "roleName", n.table_name AS table, n.operation, sum(cardinality(n.keys))::int AS rows,
       ${iso("min(n.at)")} AS "firstAt", ${iso("max(n.at)")} AS "lastAt", (array_agg(n.keys[1] ORDER BY n.id))[1:${KEYS_LIMIT}] AS keys
     FROM trail_entries n
     WHERE n.organization_id = :organizationId AND n.role_name <> session_user AND n.operation <> 'state'
       AND NOT EXISTS (SELECT 1 FROM audit_events e WHERE e.organization_id = n.organization_id AND e.transaction_id = n.transaction_id)
     GROUP BY 1, 2, 3 ORDER BY min(n.id) LIMIT ${CHANGES_LIMIT}`,
    { organizationId },
  );
  const stated = await rows<TrailState["stated"][number]>(
    `SELECT ${iso("min(n.at)")} AS at, n.role_name AS "roleName", sum(cardinality(n.keys))::int AS rows
     FROM trail_entries n WHERE n.organization_id = :organizationId AND n.operation = 'state' GROUP BY n.transaction_id, n.role_name ORDER BY min(n.id)`,
    { organizationId },
  );
  return {
    head: await trailHead(organizationId),
    tail: tail!,
    tables: tables.map(({ table }) => table),
    unwatched: tables.filter(({ isWatched }) => !isWatched).map(({ table }) => table),
    foreign,
    stated,
  };
}

interface Sealed {
  number: number;
  hash: Buffer;
  isOfEvent: boolean;
  event: EventFacts | null;
  entry: EntryFacts | null;
  salt: Buffer | null;
  isErased: boolean;
  recorded: unknown;
}

/**
 * Recomputes a stretch of an organization's chain from its events and entries. After a fault it goes on from the seal as it
 * stands, so that each is named where it is.
 */
export async function checkSeals(
  organizationId: string,
  after: number,
  limit = SEALS_LIMIT,
): Promise<SealsChecked> {
  const before = await row<{ number: number; hash: Buffer }>(
    "SELECT number::int AS number, hash FROM audit_seals WHERE organization_id = :organizationId AND number <= :after ORDER BY number DESC LIMIT 1",
    { organizationId, after },
  );
  const found = await rows<Sealed>(
    `SELECT s.number::int AS number, s.hash, s.event_id IS NOT NULL AS "isOfEvent", v.salt, v.recorded, x.event_id IS NOT NULL AS "isErased",
       CASE WHEN e.id IS NOT NULL THEN ${EVENT_FACTS} END AS event, CASE WHEN n.id IS NOT NULL THEN ${ENTRY_FACTS} END AS entry
     FROM audit_seals s LEFT JOIN audit_events e ON e.id = s.event_id LEFT JOIN audit_values v ON v.event_id = e.id
     LEFT JOIN erased_values x ON x.event_id = e.id LEFT JOIN trail_entries n ON n.id = s.entry_id LEFT JOIN trail_shapes p ON p.id = n.shape_id
     WHERE s.organization_id = :organizationId AND s.number > :after ORDER BY s.number LIMIT :limit`,
    { organizationId, after, limit },
  );
  let hash = before?.hash ?? Buffer.alloc(32);
  let expected = (before?.number ?? 0) + 1;
  let erased = 0;
  let isLinked = true;
  const faults: SealFault[] = [];
  const fault = (
    kind: SealFault["kind"],
    { event, entry }: Pick<Sealed, "event" | "entry">,
    count = 1,
  ) =>
    faults.push({
      kind,
      number: expected,
      count,
      event: event && {
        id: event.id,
        at: `${event.at.slice(0, 23)}Z`,
        action: event.action,
        subjectKind: event.subjectKind,
        subjectId: event.subjectId,
      },
      table: entry?.tableName ?? null,
    });
  for (const sealed of found) {
    const { event, entry } = sealed;
    if (sealed.number > expected) {
      fault("seal-missing", { event: null, entry: null }, sealed.number - expected);
      expected = sealed.number;
      // What the seal before was can't be known.
      isLinked = false;
    }
    const record = event ?? entry;
    if (!record) fault(sealed.isOfEvent ? "event-missing" : "entry-missing", sealed);
    else if (isLinked && !chainHash(hash, record).equals(sealed.hash)) fault("seal-broken", sealed);
    if (event) {
      // An erasure says which values it took: the rows that say so are held against the trail themselves.
      if (sealed.salt === null && sealed.isErased) erased += 1;
      else if (sealed.salt === null) fault("values-removed", sealed);
      else if (valuesDigest(sealed.salt, sealed.recorded).toString("hex") !== event.digest)
        fault("values-changed", sealed);
    }
    hash = sealed.hash;
    expected = sealed.number + 1;
    isLinked = true;
  }
  return {
    checked: found.length,
    next: found.length === limit ? found.at(-1)!.number : null,
    erased,
    faults,
  };
}

interface Shape {
  id: number;
  /** SQL of the digest over row t; null where a column of it is gone. */
  digest: string | null;
}

/**
 * Holds the rows of one table against what the trail last said of each: a row that is another, one that the trail does not
 * know, and one that it knows and that is not there.
 *
 * @throws AppError not-found: no such table is watched.
 */
export async function checkRows(organizationId: string, table: string): Promise<RowsChecked> {
  const watched = await row<{ target: string; ownerColumn: string; key: string }>(
    `SELECT quote_ident(table_name) AS target, quote_ident(owner_column) AS "ownerColumn", row_key_sql(key_columns) AS key
     FROM watched_tables WHERE table_name = :table`,
    { table },
  );
  if (!watched) throw notFound();
  const shapes = await rows<Shape>(
    `SELECT p.id, CASE WHEN p.columns <@ w.columns THEN row_digest_sql(p.columns) END AS digest
     FROM trail_shapes p JOIN watched_tables w ON w.table_name = p.table_name WHERE p.table_name = :table`,
    { table },
  );
  // Texts as the triggers write them.
  await rows(
    "SELECT set_config('timezone', 'UTC', true), set_config('datestyle', 'ISO, YMD', true), set_config('intervalstyle', 'postgres', true), set_config('extra_float_digits', '1', true), set_config('bytea_output', 'hex', true)",
  );
  const { target, ownerColumn, key } = watched;
  const digests = shapes
    .filter(({ digest }) => digest !== null)
    .map(({ id, digest }) => `WHEN ${id} THEN ${digest}`)
    .join(" ");
  const found = await rows<{ kind: RowFaultKind; key: string; faultCount: number }>(
    `WITH held AS (
       SELECT coalesce(l.key, ${key}) AS key,
         CASE WHEN l.key IS NULL THEN 'row-inserted' WHEN t.${ownerColumn} IS NULL THEN 'row-removed'
           WHEN l.digest IS DISTINCT FROM ${digests ? `CASE l.shape_id ${digests} END` : "NULL"} THEN 'row-changed' END AS kind
       FROM (SELECT * FROM ${target} WHERE ${ownerColumn} = $1::uuid) t FULL JOIN last_entries($2, $1::uuid) l ON l.key = ${key})
     SELECT kind, key, (count(*) OVER ())::int AS "faultCount" FROM held WHERE kind IS NOT NULL ORDER BY key LIMIT ${FAULTS_LIMIT}`,
    [organizationId, table],
  );
  const counted = await rows<{ count: number }>(
    `SELECT count(*)::int AS count FROM ${target} t WHERE t.${ownerColumn} = $1::uuid`,
    [organizationId],
  );
  return {
    table,
    rows: counted[0]?.count ?? 0,
    faultCount: found[0]?.faultCount ?? 0,
    faults: found.map((one) => ({ kind: one.kind, key: one.key })),
  };
}
