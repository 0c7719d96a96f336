import { addDays } from "../../shared/time/zone";
import { type AuditEvent, recordAuditMany } from "../lib/audit";
import { execute, rows } from "../lib/db";
import type { Actor } from "../lib/policy";
import { closeFitDues, closeLaidDownFits } from "./follow-fits";

interface Leaver {
  readonly id: string;
  /** The last day of work. */
  readonly leftOn: string;
}

interface Ended {
  id: string;
  workerId: string;
  crewId: string;
  isLoan: boolean;
  fromDate: string;
  toDate: string | null;
  leftOn: string;
}

const leaversAs = `jsonb_to_recordset(CAST(:leavers AS jsonb)) AS x(id uuid, "leftOn" date)`;
const span = (t: string) =>
  `lower(${t}.valid)::text AS "fromDate", (upper(${t}.valid) - 1)::text AS "toDate", x."leftOn"::text AS "leftOn"`;
const runsOn = (t: string) =>
  `${t}.worker_id = x.id AND (upper_inf(${t}.valid) OR upper(${t}.valid) > x."leftOn" + 1)`;

/**
 * What ends on the last day of those who leave: their time in a crew, loans, absences said ahead, and assignments. What
 * would only begin after it is taken back. Devices that are out stay so until they are brought back.
 */
export async function endWithLeaving(actor: Actor, leavers: readonly Leaver[]): Promise<void> {
  if (leavers.length === 0) return;
  const given = { leavers: JSON.stringify(leavers.map(({ id, leftOn }) => ({ id, leftOn }))) };
  const events = [
    ...(await endMemberships(given)),
    ...(await endAbsences(given)),
    ...(await endAssignments(given)),
  ];
  await recordAuditMany(actor, events);
  await closeLaidDownFits(actor.organizationId);
  await closeFitDues(actor.organizationId, leavers.length === 1 ? leavers[0]?.id : null);
}

/** Who goes to another site leaves the crews of the one before, with the day before the move as the last. */
export async function endCrewsElsewhere(
  actor: Actor,
  workerIds: readonly string[],
  movedOn: string,
): Promise<void> {
  if (workerIds.length === 0) return;
  const leftOn = addDays(movedOn, -1);
  const given = { leavers: JSON.stringify(workerIds.map((id) => ({ id, leftOn }))) };
  await recordAuditMany(
    actor,
    await endMemberships(
      given,
      "m.crew_id IN (SELECT c.id FROM crews c JOIN workers w ON w.id = m.worker_id WHERE c.site_id <> w.site_id)",
    ),
  );
}

type Given = { leavers: string };

const wouldBegin = ({ fromDate, leftOn }: Ended) => fromDate > leftOn;

async function endMemberships(given: Given, which = "TRUE"): Promise<AuditEvent[]> {
  const facts = `m.id, m.worker_id AS "workerId", m.crew_id AS "crewId", m.is_loan AS "isLoan", ${span("m")}`;
  const running = await rows<Ended>(
    `SELECT ${facts} FROM crew_memberships m JOIN ${leaversAs} ON ${runsOn("m")} WHERE ${which} ORDER BY m.id FOR UPDATE OF m`,
    given,
  );
  await execute("DELETE FROM crew_memberships WHERE id = ANY ($1::uuid[])", [
    running.filter(wouldBegin).map(({ id }) => id),
  ]);
  await cut(
    "crew_memberships",
    running.filter((one) => !wouldBegin(one)),
  );
  await execute("UPDATE crews SET revision = revision + 1 WHERE id = ANY ($1::uuid[])", [
    [...new Set(running.map(({ crewId }) => crewId))],
  ]);
  return running.map((one) => {
    const [ended, takenBack] = one.isLoan
      ? ["end-loan", "take-back-loan"]
      : ["end-crew-membership", "take-back-crew-membership"];
    return wouldBegin(one)
      ? ofCrew(takenBack, one, { toDate: one.toDate })
      : ofCrew(ended, one, { toDate: { from: one.toDate, to: one.leftOn } });
  });
}

async function endAbsences(given: Given): Promise<AuditEvent[]> {
  const running = await rows<Ended>(
    `SELECT a.id, a.worker_id AS "workerId", a.crew_id AS "crewId", ${span("a")} FROM absence_spans a JOIN ${leaversAs} ON ${runsOn("a")}
     WHERE NOT a.is_struck ORDER BY a.id FOR UPDATE OF a`,
    given,
  );
  await execute(
    "UPDATE absence_spans SET is_struck = TRUE, revision = revision + 1 WHERE id = ANY ($1::uuid[])",
    [running.filter(wouldBegin).map(({ id }) => id)],
  );
  await cut(
    "absence_spans",
    running.filter((one) => !wouldBegin(one)),
  );
  return running.map((one) =>
    wouldBegin(one)
      ? ofCrew("strike-absence", one, { toDate: one.toDate })
      : ofCrew("end-absence", one, { toDate: { from: one.toDate, to: one.leftOn } }),
  );
}

/** One that would only begin later is kept for its first day: what was handed out or looked at may stand on it. */
async function endAssignments(given: Given): Promise<AuditEvent[]> {
  const running = await rows<Pick<Ended, "id" | "workerId" | "fromDate" | "toDate" | "leftOn">>(
    `SELECT a.id, a.worker_id AS "workerId", lower(a.valid)::text AS "fromDate", (upper(a.valid) - 1)::text AS "toDate",
       greatest(x."leftOn", lower(a.valid))::text AS "leftOn"
     FROM assignments a JOIN ${leaversAs} ON ${runsOn("a")} AND (upper_inf(a.valid) OR upper(a.valid) > lower(a.valid) + 1)
     ORDER BY a.id FOR UPDATE OF a`,
    given,
  );
  await cut("assignments", running);
  return running.map(({ id, workerId, toDate, leftOn }) => ({
    action: "end-assignment",
    subjectKind: "worker",
    subjectId: workerId,
    values: { assignmentId: id, toDate: { from: toDate, to: leftOn } },
  }));
}

const cut = (
  table: "crew_memberships" | "absence_spans" | "assignments",
  spans: readonly Pick<Ended, "id" | "leftOn">[],
) =>
  execute(
    `UPDATE ${table} t SET valid = daterange(lower(t.valid), x."leftOn" + 1), revision = t.revision + 1
     FROM jsonb_to_recordset($1::jsonb) AS x(id uuid, "leftOn" date) WHERE t.id = x.id`,
    [JSON.stringify(spans.map(({ id, leftOn }) => ({ id, leftOn })))],
  );

const ofCrew = (
  action: string,
  { crewId, workerId, fromDate }: Ended,
  values: Readonly<Record<string, unknown>>,
): AuditEvent => ({
  action,
  subjectKind: "crew",
  subjectId: crewId,
  values: { workerId, fromDate, ...values },
});
