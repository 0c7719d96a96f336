import { createHash, randomBytes } from "node:crypto";
import { currentTransaction, row, sequelize } from "./db";
import type { Actor } from "./policy";
import { currentRequestId } from "./request-context";

export interface AuditEvent {
  /** verb-noun, such as "correct-shift". */
  action: string;
  subjectKind: string;
  subjectId: string | null;
  /** What changed. Kept apart from the event, which holds a salted digest of it. */
  values: Record<string, unknown>;
}

/** The same members in the same order, so that a digest can be taken again from the stored JSON. */
export function canonicalJson(value: unknown): string {
  if (value === null || typeof value !== "object") return JSON.stringify(value) ?? "null";
  if (Array.isArray(value)) return `[${value.map(canonicalJson).join(",")}]`;
  const members = Object.entries(value)
    .filter(([, member]) => member !== undefined)
    .sort(([a], [b]) => (a < b ? -1 : 1))
    .map(([name, member]) => `${JSON.stringify(name)}:${canonicalJson(member)}`);
  return `{${members.join(",")}}`;
}

export function valuesDigest(salt: Buffer, values: unknown): Buffer {
  return createHash("sha256").update(salt).update(canonicalJson(values)).digest();
}

type Author = Pick<Actor, "userId" | "organizationId"> | { organizationId: string };

/**
 * Writes the event of a change into the change's own transaction.
 *
 * @throws Error outside a transaction: a change without its event can't happen.
 */
export async function recordAudit(author: Author, event: AuditEvent): Promise<void> {
  await recordAuditMany(author, [event]);
}

/** The same for a change of many rows, in one statement. */
export async function recordAuditMany(
  author: Author,
  events: readonly AuditEvent[],
): Promise<void> {
  const transaction = currentTransaction();
  if (events.length === 0) return;
  const records = events.map(({ action, subjectKind, subjectId, values }) => {
    const salt = randomBytes(16);
    // As it will be read back: dates and undefined members are gone.
    const recorded = JSON.parse(JSON.stringify(values));
    return {
      action,
      subjectKind,
      subjectId,
      recorded,
      salt: salt.toString("hex"),
      digest: valuesDigest(salt, recorded).toString("hex"),
    };
  });
  await sequelize().query(
    `WITH given AS (
       SELECT x.*, row_number() OVER () AS place FROM jsonb_to_recordset($4::jsonb)
         AS x(action text, "subjectKind" text, "subjectId" uuid, recorded jsonb, salt text, digest text)),
     event AS (
       INSERT INTO audit_events (organization_id, actor_id, request_id, action, subject_kind, subject_id, values_digest)
       SELECT $1, $2, $3, action, "subjectKind", "subjectId", decode(digest, 'hex') FROM given ORDER BY place
       RETURNING id, values_digest)
     INSERT INTO audit_values (event_id, organization_id, salt, recorded)
     SELECT e.id, $1, decode(g.salt, 'hex'), g.recorded FROM event e JOIN given g ON decode(g.digest, 'hex') = e.values_digest`,
    {
      bind: [
        author.organizationId,
        "userId" in author ? author.userId : null,
        currentRequestId(),
        JSON.stringify(records),
      ],
      transaction,
    },
  );
}

/** An event of the trail, as far as its seal covers it. */
export interface EventFacts {
  id: string;
  at: string;
  actorId: string | null;
  action: string;
  subjectKind: string;
  subjectId: string | null;
  digest: string;
}

/** An entry on rows (migrations/20261202090000-row-trail.ts), as far as its seal covers it. */
export interface EntryFacts {
  entryId: string;
  at: string;
  roleName: string;
  tableName: string;
  operation: string;
  /** SHA-256 over the shape's columns, the keys and the digests, in hex. */
  content: string;
}

/** What a seal covers, in an order that never changes. An event's first line is a number, an entry's the word "rows". */
export function sealedText(record: EventFacts | EntryFacts): string {
  if ("entryId" in record)
    return [
      "rows",
      record.entryId,
      record.at,
      record.roleName,
      record.tableName,
      record.operation,
      record.content,
    ].join("\n");
  return [
    record.id,
    record.at,
    record.actorId ?? "",
    record.action,
    record.subjectKind,
    record.subjectId ?? "",
    record.digest,
  ].join("\n");
}

export function chainHash(previous: Buffer, record: EventFacts | EntryFacts): Buffer {
  return createHash("sha256").update(previous).update(sealedText(record)).digest();
}

const utc = (column: string) =>
  `to_char(${column} AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.US')`;

/** SQL: an event as JSON, of the alias `e`. */
export const EVENT_FACTS = `json_build_object('id', e.id::text, 'at', ${utc("e.at")}, 'actorId', e.actor_id, 'action', e.action,
  'subjectKind', e.subject_kind, 'subjectId', e.subject_id, 'digest', encode(e.values_digest, 'hex'))`;

/** SQL: an entry on rows as JSON, of the aliases `n` (trail_entries) and `p` (trail_shapes). */
export const ENTRY_FACTS = `json_build_object('entryId', n.id::text, 'at', ${utc("n.at")}, 'roleName', n.role_name, 'tableName', n.table_name,
  'operation', n.operation, 'content', encode(sha256(convert_to(array_to_string(p.columns || p.types, chr(10)) || chr(10) || array_to_string(n.keys, chr(10)) || chr(10)
    || coalesce((SELECT string_agg(encode(g, 'hex'), chr(10) ORDER BY place) FROM unnest(n.digests) WITH ORDINALITY u(g, place)), ''), 'UTF8')), 'hex'))`;

/**
 * Chains what is committed and has no seal yet: events, then entries on rows, each in the order of their numbers. Runs
 * inside a transaction of the organization; a second sealer waits. What a transaction still open wrote, or one numbered
 * above it, is left for later.
 *
 * @returns how many seals were set; fewer than `limit`: nothing is left for now.
 */
export async function sealTrail(organizationId: string, limit = 5000): Promise<number> {
  const transaction = currentTransaction();
  await sequelize().query("SELECT pg_advisory_xact_lock(hashtextextended('seal:' || $1, 0))", {
    bind: [organizationId],
    transaction,
  });
  const last = await row<{ number: string; hash: Buffer }>(
    "SELECT number, hash FROM audit_seals WHERE organization_id = :organizationId ORDER BY number DESC LIMIT 1",
    { organizationId },
  );
  // In a restored database transactions count anew: numbers from before lie in its future, and a floor there is none.
  const span = await row<{ floor: string; open: string; next: string }>(
    `SELECT pg_snapshot_xmin(s)::text AS open, pg_snapshot_xmax(s)::text AS next,
       coalesce((SELECT f.transaction_id FROM trail_floors f WHERE f.organization_id = :organizationId AND f.transaction_id <= pg_snapshot_xmax(s)), '0'::xid8)::text AS floor
     FROM pg_current_snapshot() s`,
    { organizationId },
  );
  const { floor, open, next } = span!;
  const isDue = (alias: string) =>
    `((${alias}.transaction_id >= $3::xid8 AND ${alias}.transaction_id < $4::xid8) OR ${alias}.transaction_id > $5::xid8)`;
  const [found] = await sequelize().query(
    `(SELECT 1 AS kind, e.id AS place, ${EVENT_FACTS} AS record
       FROM audit_events e LEFT JOIN audit_seals s ON s.event_id = e.id
      WHERE e.organization_id = $1 AND s.event_id IS NULL AND ${isDue("e")} ORDER BY e.id LIMIT $2)
     UNION ALL
     (SELECT 2, n.id, ${ENTRY_FACTS}
       FROM trail_entries n JOIN trail_shapes p ON p.id = n.shape_id LEFT JOIN audit_seals s ON s.entry_id = n.id
      WHERE n.organization_id = $1 AND s.entry_id IS NULL AND ${isDue("n")} ORDER BY n.id LIMIT $2)
     ORDER BY kind, place LIMIT $2`,
    { bind: [organizationId, limit, floor, open, next], transaction },
  );
  const records = (found as { record: EventFacts | EntryFacts }[]).map(({ record }) => record);
  let hash = last?.hash ?? Buffer.alloc(32);
  let number = Number(last?.number ?? 0);
  const seals = records.map((record) => {
    hash = chainHash(hash, record);
    number += 1;
    return {
      number,
      eventId: "entryId" in record ? null : record.id,
      entryId: "entryId" in record ? record.entryId : null,
      hash: hash.toString("hex"),
    };
  });
  if (seals.length > 0)
    await sequelize().query(
      `INSERT INTO audit_seals (organization_id, number, event_id, entry_id, hash)
       SELECT $1, x.number, x."eventId", x."entryId", decode(x.hash, 'hex')
       FROM jsonb_to_recordset($2::jsonb) AS x(number bigint, "eventId" bigint, "entryId" bigint, hash text)`,
      { bind: [organizationId, JSON.stringify(seals)], transaction },
    );
  if (seals.length > 0 && seals.length < limit)
    await sequelize().query(
      `INSERT INTO trail_floors (organization_id, transaction_id) VALUES ($1, $2::xid8)
       ON CONFLICT (organization_id) DO UPDATE SET transaction_id = excluded.transaction_id`,
      { bind: [organizationId, open], transaction },
    );
  return seals.length;
}
