import { recordAudit } from "../lib/audit";
import { checkSpan, daysFromTo } from "../lib/date-range";
import { execute, row } from "../lib/db";
import { notFound } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import type { Crew } from "../models/worker";

interface AbsenceRow {
  id: string;
  workerId: string;
  fromDate: string;
  toDate: string | null;
  revision: number;
}

/** An absence that was entered through this crew, locked. */
async function absenceOf(crew: Crew, id: string): Promise<AbsenceRow> {
  const found = await row<AbsenceRow>(
    `SELECT id, worker_id AS "workerId", lower(valid)::text AS "fromDate", (upper(valid) - 1)::text AS "toDate", revision
     FROM absence_spans WHERE id = :id AND crew_id = :crewId AND NOT is_struck FOR UPDATE`,
    { id, crewId: crew.id },
  );
  if (!found) throw notFound();
  return found;
}

/** The last day on which somebody is not in. */
export async function endAbsence(
  actor: Actor,
  crew: Crew,
  id: string,
  toDate: string,
  seenRevision: number,
  current: () => Promise<unknown>,
): Promise<void> {
  const absence = await absenceOf(crew, id);
  await requireRevision(absence, seenRevision, current);
  checkSpan(absence.fromDate, toDate);
  if (absence.toDate === toDate) return;
  await execute(
    `UPDATE absence_spans SET valid = ${daysFromTo("$2", "$3")}, revision = revision + 1 WHERE id = $1`,
    [id, absence.fromDate, toDate],
  );
  await recordAudit(actor, {
    action: "end-absence",
    subjectKind: "crew",
    subjectId: crew.id,
    values: {
      workerId: absence.workerId,
      fromDate: absence.fromDate,
      toDate: { from: absence.toDate, to: toDate },
    },
  });
}

/** It was entered by mistake: they are in. */
export async function strikeAbsence(
  actor: Actor,
  crew: Crew,
  id: string,
  seenRevision: number,
  current: () => Promise<unknown>,
): Promise<void> {
  const absence = await absenceOf(crew, id);
  await requireRevision(absence, seenRevision, current);
  await execute(
    "UPDATE absence_spans SET is_struck = TRUE, revision = revision + 1 WHERE id = $1",
    [id],
  );
  const { workerId, fromDate, toDate } = absence;
  await recordAudit(actor, {
    action: "strike-absence",
    subjectKind: "crew",
    subjectId: crew.id,
    values: { workerId, fromDate, toDate },
  });
}
