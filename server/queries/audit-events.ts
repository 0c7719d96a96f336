import type { AuditEventFilter, AuditEventView } from "../../shared/schemas/audit-event";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import { type Actor, visible } from "../lib/policy";
import { auditPolicy } from "../policies";

export type AuditEventRow = Omit<AuditEventView, "at"> & { at: Date };

/** The trail, the latest first. */
export async function pageOfAuditEvents(actor: Actor, filter: AuditEventFilter) {
  const before = decodeCursor(filter.cursor, 1)?.[0] ?? null;
  if (before !== null && !/^\d{1,18}$/.test(String(before)))
    throw unprocessable([issue(["cursor"], "cursor-unknown")]);
  const conditions = [
    "e.organization_id = :organizationId",
    visible(auditPolicy, actor, "e"),
    before !== null && "e.id < CAST(:before AS bigint)",
    filter.subjectKind && "e.subject_kind = :subjectKind",
    filter.subjectId && "e.subject_id = :subjectId",
    filter.actorId && "e.actor_id = :actorId",
  ].filter(Boolean);
  const found = await rows<AuditEventRow>(
    `SELECT e.id::text AS id, e.at, e.actor_id AS "actorId", u.name AS "actorName", e.action, e.subject_kind AS "subjectKind",
       e.subject_id AS "subjectId", v.recorded AS "values", s.event_id IS NOT NULL AS "isSealed"
     FROM audit_events e LEFT JOIN audit_values v ON v.event_id = e.id LEFT JOIN users u ON u.id = e.actor_id
     LEFT JOIN audit_seals s ON s.event_id = e.id
     WHERE ${conditions.join(" AND ")} ORDER BY e.id DESC LIMIT :limit`,
    {
      organizationId: actor.organizationId,
      before: before === null ? null : String(before),
      subjectKind: filter.subjectKind ?? null,
      subjectId: filter.subjectId ?? null,
      actorId: filter.actorId ?? null,
      limit: filter.limit + 1,
    },
  );
  return pageFrom(found, filter.limit, ({ id }) => [id]);
}
