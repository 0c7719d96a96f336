import { randomUUID } from "node:crypto";
import type { z } from "zod";
import {
  ROSTER_LINES_LIMIT,
  type RosterForm,
  type RosterPerson,
  type RosterReport,
} from "../../shared/schemas/roster";
import { decodeText } from "../imports/decode-text";
import { draftRoster, ROSTER_COLUMNS, type RosterEntry } from "../imports/draft-roster";
import { readCsv } from "../imports/read-csv";
import { recordAudit, recordAuditMany } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { changesBetween } from "../lib/changes";
import { execute } from "../lib/db";
import { AppError } from "../lib/errors";
import { leavesNobodyToAdminister } from "../lib/grants";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import { isOwnRunningOn } from "../queries/attendance";
import { endCrewsElsewhere, endWithLeaving } from "./end-with-leaving";

const ISSUES_SHOWN = 500;
const PEOPLE_SHOWN = 500;

type Placed = RosterEntry & { id: string };

/**
 * Joiners, movers and leavers of a site from a file, by employee number: all of it or nothing. A dry run says line by line
 * what stands in the way, who would join, change and leave, and what has to be confirmed.
 *
 * @throws AppError import-refused with the report, where a line has a fault; invalid, where somebody missing
 * from the file has worked since the day they would have left; roster-unconfirmed, where half of the people or the last
 * administrator would leave and nobody confirmed how many; nothing-to-do.
 */
export async function importRoster(
  actor: Actor,
  site: Site,
  {
    form,
    isDryRun,
    bytes,
  }: { form: z.output<typeof RosterForm>; isDryRun: boolean; bytes: Buffer },
): Promise<RosterReport> {
  const file = await readCsv(decodeText(bytes), ROSTER_COLUMNS, ROSTER_LINES_LIMIT);
  const draft =
    file.lines.length > 0
      ? await draftRoster(actor, site, file, form.missingLeftOn)
      : { entries: [], present: 0, issues: [] };
  const issues = [...file.issues, ...draft.issues].toSorted((a, b) => a.line - b.line);
  const entries = draft.entries.map((entry) => ({ ...entry, id: entry.known?.id ?? randomUUID() }));
  const people = entries.flatMap(personOf);
  const leavers = people.filter(({ what }) => what === "leaves").length;
  const asks: RosterReport["asks"] = [];
  if (leavers * 2 > draft.present && leavers > 1) asks.push("half-leave");
  const leaving = entries.filter(({ leaves }) => leaves).map(({ id }) => id);
  if (
    leaving.length > 0 &&
    (await leavesNobodyToAdminister(actor.organizationId, { workerIds: leaving }))
  )
    asks.push("last-administrator-leaves");
  const report: RosterReport = {
    isDryRun,
    fileName: form.file.name,
    lines: file.lines.length,
    joiners: people.filter(({ what }) => what === "joins").length,
    changed: people.filter(({ what }) => what === "changes").length,
    leavers,
    unchanged: entries.length - people.length,
    present: draft.present,
    asks,
    people: people.slice(0, PEOPLE_SHOWN),
    issues: issues.slice(0, ISSUES_SHOWN),
    issuesCount: issues.length,
  };
  if (isDryRun) return report;
  if (issues.length > 0)
    throw new AppError("import-refused", 422, { issuesCount: issues.length }, [], { report });
  if (people.length === 0) throw new AppError("nothing-to-do", 409);
  if (asks.length > 0 && form.confirmedLeavers !== leavers)
    throw new AppError("roster-unconfirmed", 409, { leavers, present: draft.present }, [], {
      report,
    });
  await store(actor, site, entries);
  const { name: fileName, sha256 } = form.file;
  const { joiners, changed } = report;
  await recordAudit(actor, {
    action: "import-roster",
    subjectKind: "site",
    subjectId: site.id,
    values: { fileName, sha256, joiners, changed, leavers, missingLeftOn: form.missingLeftOn },
  });
  return report;
}

/** Nobody where nothing changes. Who leaves leaves, whatever else is corrected on the way. */
function personOf({ known, facts, changes, leaves, crew }: RosterEntry): RosterPerson[] {
  const { employeeNumber, name } = facts;
  const all = crew ? [...changes, "crew" as const] : changes;
  if (!known) return [{ employeeNumber, name, what: "joins", date: facts.hiredOn, changes: [] }];
  if (leaves) return [{ employeeNumber, name, what: "leaves", date: facts.leftOn, changes: all }];
  if (all.length === 0) return [];
  return [{ employeeNumber, name, what: "changes", date: crew?.fromDate ?? null, changes: all }];
}

async function store(actor: Actor, site: Site, entries: readonly Placed[]): Promise<void> {
  const { organizationId } = actor;
  const json = (of: readonly Placed[]) =>
    JSON.stringify(of.map(({ id, facts }) => ({ id, ...facts })));
  const columns = `x(id uuid, "siteId" uuid, "jobId" uuid, "employeeNumber" text, name text, employer text, "employerName" text, language text, "hiredOn" date, "leftOn" date)`;
  const joining = entries.filter(({ known }) => known === null);
  const changing = entries.filter(
    ({ known, changes, leaves }) => known && (leaves || changes.length > 0),
  );
  await execute(
    `INSERT INTO workers (id, organization_id, site_id, job_id, employee_number, name, employer, employer_name, language, hired_on, left_on)
     SELECT x.id, $1, x."siteId", x."jobId", x."employeeNumber", x.name, x.employer, x."employerName", x.language, x."hiredOn", x."leftOn"
     FROM jsonb_to_recordset($2::jsonb) AS ${columns}`,
    [organizationId, json(joining)],
  );
  await execute(
    `UPDATE workers w SET site_id = x."siteId", job_id = x."jobId", name = x.name, employer = x.employer, employer_name = x."employerName",
       language = x.language, hired_on = x."hiredOn", left_on = x."leftOn", revision = w.revision + 1
     FROM jsonb_to_recordset($1::jsonb) AS ${columns} WHERE w.id = x.id`,
    [json(changing)],
  );
  const moves = entries.flatMap(({ id, crew }) =>
    crew ? [{ workerId: id, crewId: crew.id, fromDate: crew.fromDate }] : [],
  );
  const moveColumns = `x("workerId" uuid, "crewId" uuid, "fromDate" date)`;
  await execute(
    `UPDATE crew_memberships m SET valid = daterange(lower(m.valid), x."fromDate") FROM jsonb_to_recordset($1::jsonb) AS ${moveColumns}
     WHERE ${isOwnRunningOn("m", 'x."workerId"', 'x."fromDate"')}`,
    [JSON.stringify(moves)],
  );
  await execute(
    `INSERT INTO crew_memberships (organization_id, crew_id, worker_id, valid)
     SELECT $1, x."crewId", x."workerId", daterange(x."fromDate", NULL) FROM jsonb_to_recordset($2::jsonb) AS ${moveColumns}`,
    [organizationId, JSON.stringify(moves)],
  );
  await execute("UPDATE crews SET revision = revision + 1 WHERE id = ANY ($1::uuid[])", [
    [...new Set(moves.map(({ crewId }) => crewId))],
  ]);
  await recordAuditMany(actor, [
    ...joining.map(({ id, facts }) => ({
      action: "create-worker",
      subjectKind: "worker",
      subjectId: id,
      values: { ...facts },
    })),
    ...changing.map(({ id, known, facts }) => ({
      action: "change-worker",
      subjectKind: "worker",
      subjectId: id,
      values: changesBetween(known!, facts),
    })),
    ...moves.map(({ crewId, ...move }) => ({
      action: "add-crew-member",
      subjectKind: "crew",
      subjectId: crewId,
      values: { ...move, siteId: site.id },
    })),
  ]);
  await endCrewsElsewhere(
    actor,
    entries.flatMap(({ id, changes }) => (changes.includes("site") ? [id] : [])),
    todayAt(site.timeZone),
  );
  await endWithLeaving(
    actor,
    entries.flatMap(({ id, leaves, facts: { leftOn } }) =>
      leaves && leftOn !== null ? [{ id, leftOn }] : [],
    ),
  );
}
