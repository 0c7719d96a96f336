import type { AuditEventView } from "../../shared/schemas/audit-event";
import type { AuditEventRow } from "../queries/audit-events";

export function presentAuditEvent(row: AuditEventRow): AuditEventView {
  return {
    id: row.id,
    at: row.at.toISOString(),
    actorId: row.actorId,
    actorName: row.actorName,
    action: row.action,
    subjectKind: row.subjectKind,
    subjectId: row.subjectId,
    timeZone: row.timeZone,
    values: row.values,
    isSealed: row.isSealed,
  };
}
