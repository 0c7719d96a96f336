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

interface Unsealed {
  id: string;
  at: string;
  actorId: string | null;
  action: string;
  subjectKind: string;
  subjectId: string | null;
  digest: string;
}

/** What a seal covers of an event, in an order that never changes. */
export function sealedText(event: Unsealed): string {
  return [
    event.id,
    event.at,
    event.actorId ?? "",
    event.action,
    event.subjectKind,
    event.subjectId ?? "",
    event.digest,
  ].join("\n");
}

export function chainHash(previous: Buffer, event: Unsealed): Buffer {
  return createHash("sha256").update(previous).update(sealedText(event)).digest();
}

/**
 * Chains committed events that have no seal yet, in the order of their numbers. Runs inside a transaction of the
 * organization; a second sealer waits. An event of a transaction still open, or numbered below one, is left for later.
 */
export async function sealEvents(organizationId: string, limit = 5000): Promise<number> {
  const transaction = currentTransaction();
  await sequelize().query("SELECT pg_advisory_xact_lock(hashtextextended('seal:' || $1, 0))", {
    bind: [organizationId],
    transaction,
  });
  const last = await row<{ number: string; hash: Buffer }>(
    "SELECT number, hash FROM audit_seals WHERE organization_id = :organizationId ORDER BY number DESC LIMIT 1",
    { organizationId },
  );
  const [found] = await sequelize().query(
    `SELECT e.id::text AS id, to_char(e.at AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.US') AS at, e.actor_id AS "actorId", e.action,
            e.subject_kind AS "subjectKind", e.subject_id AS "subjectId", encode(e.values_digest, 'hex') AS digest
       FROM audit_events e LEFT JOIN audit_seals s ON s.event_id = e.id
      WHERE e.organization_id = $1 AND s.event_id IS NULL AND e.transaction_id < pg_snapshot_xmin(pg_current_snapshot())
      ORDER BY e.id LIMIT $2`,
    { bind: [organizationId, limit], transaction },
  );
  const events = found as Unsealed[];
  if (events.length === 0) return 0;
  let hash = last?.hash ?? Buffer.alloc(32);
  let number = Number(last?.number ?? 0);
  const seals = events.map((event) => {
    hash = chainHash(hash, event);
    number += 1;
    return { number, eventId: event.id, hash: hash.toString("hex") };
  });
  await sequelize().query(
    `INSERT INTO audit_seals (organization_id, number, event_id, hash)
     SELECT $1, (s->>'number')::bigint, (s->>'eventId')::bigint, decode(s->>'hash', 'hex') FROM jsonb_array_elements($2::jsonb) s`,
    { bind: [organizationId, JSON.stringify(seals)], transaction },
  );
  return seals.length;
}
