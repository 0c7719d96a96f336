import type {
  AuditEventFilter,
  AuditEventView,
  NamedThing,
} from "../../shared/schemas/audit-event";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import { type Actor, visible } from "../lib/policy";
import {
  auditPolicy,
  crewPolicy,
  findingPolicy,
  fitPolicy,
  historyPolicy,
  letterPolicy,
  mappingPolicy,
  noticePolicy,
  programmePolicy,
  protectorPolicy,
  runPolicy,
  shiftPolicy,
  signalPolicy,
  siteOfEvent,
  sitePolicy,
  surveyPolicy,
  wearingPolicy,
  workerNamePolicy,
  workerPolicy,
} from "../policies";

export type AuditEventRow = Omit<AuditEventView, "at"> & { at: Date };

/** The trail, the latest first, with the names of what its events are about and mention. */
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
       e.subject_id AS "subjectId", (SELECT z.time_zone FROM sites z WHERE z.id = ${siteOfEvent("e")}) AS "timeZone",
       v.recorded AS "values", s.event_id IS NOT NULL AS "isSealed"
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
  const page = pageFrom(found, filter.limit, ({ id }) => [id]);
  return { ...page, names: await namesOf(actor, idsIn(page.rows)) };
}

/** Every id that the events are about or mention, wherever in their values it stands. */
function idsIn(events: readonly AuditEventRow[]): string[] {
  const text = JSON.stringify(events.map(({ subjectId, values }) => [subjectId, values]));
  const quoted = /"([0-9a-f]{8}(?:-[0-9a-f]{4}){3}-[0-9a-f]{12})"/g;
  return [...new Set([...text.matchAll(quoted)].map(([, id = ""]) => id))];
}

/** What ids stand for, as far as the reader may see it, in one statement. What has no name of its own says whose and when. */
async function namesOf(actor: Actor, ids: readonly string[]): Promise<NamedThing[]> {
  if (ids.length === 0) return [];
  const sees = (...conditions: string[]) => `(${conditions.join(" OR ")})`;
  const programme = (kind: string, table: string) => ({
    kind,
    from: `${table} t`,
    name: "t.name",
    condition: visible(programmePolicy, actor, "t"),
  });
  const things: {
    kind: string;
    from: string;
    name: string;
    date?: string;
    code?: string;
    condition: string;
  }[] = [
    programme("area", "areas"),
    programme("task", "tasks"),
    programme("job", "jobs"),
    programme("instrument", "instruments"),
    { kind: "site", from: "sites t", name: "t.name", condition: visible(sitePolicy, actor, "t") },
    {
      kind: "group-mapping",
      from: "group_mappings t",
      name: "t.group_name",
      condition: visible(mappingPolicy, actor, "t"),
    },
    { kind: "crew", from: "crews t", name: "t.name", condition: visible(crewPolicy, actor, "t") },
    {
      kind: "worker",
      from: "workers t",
      name: "t.name",
      condition: sees(visible(workerPolicy, actor, "t"), visible(workerNamePolicy, actor, "t")),
    },
    // Whoever reads the trail reads in it who did what: names of sign-ins are no secret there.
    { kind: "user", from: "users t", name: "t.name", condition: "TRUE" },
    {
      kind: "protector",
      from: "protector_models t",
      name: "t.name",
      condition: visible(protectorPolicy, actor, "t"),
    },
    {
      kind: "shift",
      from: "shifts t JOIN workers w ON w.id = t.worker_id",
      name: "w.name",
      date: "t.date",
      condition: visible(shiftPolicy, actor, "t"),
    },
    {
      kind: "run",
      from: "runs t LEFT JOIN workers w ON w.id = t.worker_id LEFT JOIN areas a ON a.id = t.area_id",
      name: "coalesce(w.name, a.name)",
      date: "t.date",
      condition: visible(runPolicy, actor, "t"),
    },
    {
      kind: "finding",
      from: "findings t LEFT JOIN workers w ON w.id = t.worker_id LEFT JOIN jobs j ON j.id = t.job_id LEFT JOIN instruments i ON i.id = t.instrument_id",
      name: "coalesce(w.name, j.name, i.name)",
      date: "t.last_date",
      code: "t.kind",
      condition: visible(findingPolicy, actor, "t"),
    },
    {
      kind: "notice",
      from: "notices t JOIN users u ON u.id = t.recipient_id",
      name: "u.name",
      condition: visible(noticePolicy, actor, "t"),
    },
    {
      kind: "letter",
      from: "result_letters t JOIN workers w ON w.id = t.worker_id",
      name: "w.name",
      condition: visible(letterPolicy, actor, "t"),
    },
    {
      kind: "survey",
      from: "surveys t",
      name: "t.name",
      condition: visible(surveyPolicy, actor, "t"),
    },
    {
      kind: "workplace-change",
      from: "workplace_changes t LEFT JOIN areas a ON a.id = t.area_id LEFT JOIN tasks k ON k.id = t.task_id LEFT JOIN jobs j ON j.id = t.job_id",
      name: "coalesce(a.name, k.name, j.name)",
      date: "t.happened_on",
      condition: visible(surveyPolicy, actor, "t"),
    },
    {
      kind: "time-history",
      from: "time_histories t JOIN runs r ON r.id = t.run_id LEFT JOIN workers w ON w.id = r.worker_id LEFT JOIN areas a ON a.id = r.area_id",
      name: "coalesce(w.name, a.name)",
      date: "r.date",
      condition: visible(historyPolicy, actor, "t"),
    },
    {
      kind: "history-import",
      from: "history_imports t JOIN instruments i ON i.id = t.instrument_id",
      name: "i.name",
      condition: visible(historyPolicy, actor, "t"),
    },
    {
      kind: "recording",
      from: "recordings t JOIN tasks k ON k.id = t.task_id",
      name: "k.name",
      condition: visible(historyPolicy, actor, "t"),
    },
    {
      kind: "fit-test",
      from: "fit_tests t JOIN workers w ON w.id = t.worker_id",
      name: "w.name",
      date: "t.tested_on",
      condition: visible(fitPolicy, actor, "t"),
    },
    {
      kind: "microphone-check",
      from: "microphone_checks t JOIN workers w ON w.id = t.worker_id",
      name: "w.name",
      condition: visible(fitPolicy, actor, "t"),
    },
    {
      kind: "protector-issue",
      from: "protector_issues t JOIN workers w ON w.id = t.worker_id",
      name: "w.name",
      date: "t.issued_on",
      condition: visible(fitPolicy, actor, "t"),
    },
    {
      kind: "wearing-round",
      from: "wearing_rounds t JOIN sites s ON s.id = t.site_id",
      name: "s.name",
      date: "t.seen_on",
      condition: visible(wearingPolicy, actor, "t"),
    },
    {
      kind: "warning-signal",
      from: "warning_signals t",
      name: "t.name",
      condition: visible(signalPolicy, actor, "t"),
    },
  ];
  const parts = things.map(
    ({ kind, from, name, date = "NULL::date", code = "NULL", condition }) =>
      `SELECT t.id, '${kind}' AS kind, ${name} AS name, ${date}::text AS date, ${code}::text AS code FROM ${from} WHERE t.id = ANY ($1::uuid[]) AND ${condition}`,
  );
  return rows<NamedThing>(parts.join("\nUNION ALL "), [[...ids]]);
}
