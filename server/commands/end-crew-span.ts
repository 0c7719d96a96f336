import { recordAudit } from "../lib/audit";
import { checkSpan, daysFromTo } from "../lib/date-range";
import { execute, row } from "../lib/db";
import { notFound } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Crew } from "../models/worker";

const spans = {
  member: { table: "crew_memberships", person: "worker_id", action: "end-crew-membership" },
  supervisor: { table: "crew_supervisors", person: "user_id", action: "end-crew-supervision" },
} as const;

/** The last day of a membership, or of a supervisor's time with a crew. */
export async function endCrewSpan(
  actor: Actor,
  crew: Crew,
  kind: keyof typeof spans,
  id: string,
  toDate: string,
): Promise<void> {
  const { table, person, action } = spans[kind];
  const span = await row<{ personId: string; fromDate: string; toDate: string | null }>(
    `SELECT ${person} AS "personId", lower(valid)::text AS "fromDate", (upper(valid) - 1)::text AS "toDate"
     FROM ${table} WHERE id = :id AND crew_id = :crewId FOR UPDATE`,
    { id, crewId: crew.id },
  );
  if (!span) throw notFound();
  checkSpan(span.fromDate, toDate);
  if (span.toDate === toDate) return;
  const revised = kind === "member" ? ", revision = revision + 1" : "";
  await execute(`UPDATE ${table} SET valid = ${daysFromTo("$2", "$3")}${revised} WHERE id = $1`, [
    id,
    span.fromDate,
    toDate,
  ]);
  await crew.update({ revision: crew.revision + 1 });
  const values = {
    [kind === "member" ? "workerId" : "userId"]: span.personId,
    fromDate: span.fromDate,
    toDate: { from: span.toDate, to: toDate },
  };
  await recordAudit(actor, { action, subjectKind: "crew", subjectId: crew.id, values });
}
