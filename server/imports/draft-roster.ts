import { EmployeeNumber, Language, Name } from "../../shared/schemas/common";
import type { RosterPerson } from "../../shared/schemas/roster";
import { dateIssues } from "../lib/calendar";
import { rows } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import { type Actor, visible } from "../lib/policy";
import type { Site } from "../models/site";
import { workerPolicy } from "../policies";
import { daysAfterLeaving } from "../queries/days-after-leaving";
import { Cells } from "./cells";
import type { ImportColumn } from "./columns";
import { toProblemIssue } from "./import-draft";
import type { CsvFile, CsvLine } from "./read-csv";

/** The columns of a roster, in the order of its template. */
export const ROSTER_COLUMNS: readonly ImportColumn[] = [
  {
    name: "employee_number",
    kind: "text",
    example: "1041",
    meaning: "Employee number: by it a worker is known",
    isRequired: true,
  },
  { name: "name", kind: "text", example: "R. Szabó", meaning: "Name", isRequired: true },
  {
    name: "hired_on",
    kind: "date",
    example: "2026-03-02",
    meaning: "First day; needed for whoever is new",
    isRequired: false,
  },
  {
    name: "left_on",
    kind: "date",
    example: "",
    meaning: "Last day; empty: still there",
    isRequired: false,
  },
  {
    name: "employer",
    kind: "choice",
    example: "own",
    meaning: "own, agency or contractor",
    isRequired: false,
  },
  {
    name: "employer_name",
    kind: "text",
    example: "",
    meaning: "The agency’s or contractor’s name",
    isRequired: false,
  },
  {
    name: "language",
    kind: "choice",
    example: "en",
    meaning: Language.options.join(", "),
    isRequired: false,
  },
  {
    name: "job",
    kind: "text",
    example: "Fettler",
    meaning: "Name of a job of the site; empty: as it is",
    isRequired: false,
  },
  {
    name: "crew",
    kind: "text",
    example: "Early fettlers",
    meaning: "Name of a crew of the site; empty: as it is",
    isRequired: false,
  },
  {
    name: "crew_from",
    kind: "date",
    example: "2026-03-02",
    meaning: "First day in that crew; needed where it is another than before",
    isRequired: false,
  },
];

export interface RosterFacts {
  siteId: string;
  employeeNumber: string;
  name: string;
  hiredOn: string;
  leftOn: string | null;
  employer: string;
  employerName: string | null;
  language: string;
  jobId: string | null;
}

/** Somebody whom the organization has already. */
interface Known extends RosterFacts {
  id: string;
  isOurs: boolean;
}

export interface RosterEntry {
  /** Null: somebody new. */
  known: Known | null;
  facts: RosterFacts;
  changes: RosterPerson["changes"];
  leaves: boolean;
  /** The crew that is joined, and from when. */
  crew: { id: string; fromDate: string } | null;
}

export interface RosterDraft {
  entries: RosterEntry[];
  /** Present before at this site. */
  present: number;
  issues: Cells["issues"];
}

const EMPLOYERS = ["own", "agency", "contractor"] as const;

/**
 * What a roster would do to the workers of a site.
 *
 * @throws AppError invalid, where somebody missing from the file has worked since the day they would have left
 */
export async function draftRoster(
  actor: Actor,
  site: Site,
  file: CsvFile,
  missingLeftOn: string | null,
): Promise<RosterDraft> {
  const cells = new Cells(file, ROSTER_COLUMNS);
  const numbers = file.lines.map((line) => cells.text(line, "employee_number") ?? "");
  const known = await knownWorkers(actor, site.id, numbers);
  const jobs = await idsAt("jobs", site.id);
  const crews = await idsAt("crews", site.id);
  const memberships = await membershipsOf([...known.values()].map(({ id }) => id));
  const seen = new Set<string>();
  const read: { line: CsvLine; entry: RosterEntry }[] = [];
  for (const line of file.lines) {
    const entry = readLine(line);
    if (entry) read.push({ line, entry });
  }
  const late = await daysAfterLeaving(
    read.flatMap(({ entry: { known: before, facts, leaves } }) =>
      before && leaves && facts.leftOn !== null ? [{ id: before.id, leftOn: facts.leftOn }] : [],
    ),
  );
  const entries: RosterEntry[] = [];
  for (const { line, entry } of read) {
    const lastOn = late.get(entry.known?.id ?? "");
    if (lastOn) cells.refuse(line, "left_on", "shift-after-leaving", { lastOn });
    if (cells.areGood([line])) entries.push(entry);
  }
  const missing =
    missingLeftOn === null ? [] : await presentWithout(site.id, missingLeftOn, numbers);
  await checkMissing(missing, missingLeftOn);
  for (const one of missing)
    entries.push({
      known: one,
      facts: factsOf(one, { leftOn: missingLeftOn }),
      changes: [],
      leaves: true,
      crew: null,
    });
  const present = await presentCount(site.id);
  return { entries, present, issues: cells.issues };

  function readLine(line: CsvLine): RosterEntry | null {
    const number = cells.needed(line, "employee_number");
    const name = cells.needed(line, "name");
    if (number === null || name === null) return null;
    check(line, "employee_number", EmployeeNumber.safeParse(number).error?.issues);
    check(line, "name", Name(200).safeParse(name).error?.issues);
    if (seen.has(number)) return cells.refuse(line, "employee_number", "worker-twice");
    seen.add(number);
    const before = known.get(number) ?? null;
    if (before && !before.isOurs)
      return cells.refuse(line, "employee_number", "worker-of-another-site");
    const date = (field: string) => (line.cells.get(field) ? cells.date(line, field) : null);
    const hiredOn = date("hired_on") ?? before?.hiredOn ?? null;
    const jobName = cells.text(line, "job");
    if (jobName !== null && !jobs.has(jobName)) cells.refuse(line, "job", "job-unknown");
    if (hiredOn === null) {
      cells.refuseUnlessRefused(line, "hired_on", "first-day-needed", {});
      return null;
    }
    const leftOn = date("left_on");
    for (const [field, day] of [
      ["hired_on", hiredOn],
      ["left_on", leftOn],
    ] as const)
      for (const { code, params } of dateIssues([field], day))
        cells.refuse(line, field, code, params);
    if (leftOn !== null && leftOn < hiredOn)
      cells.refuse(line, "left_on", "left-before-hired", { hiredOn });
    if (before?.leftOn && leftOn === null)
      cells.refuse(line, "left_on", "left-already", { leftOn: before.leftOn });
    const isMove = before !== null && before.siteId !== site.id;
    const facts = factsOf(
      before ?? {
        employer: "own",
        employerName: null,
        language: site.language,
        jobId: null,
        leftOn: null,
      },
      {
        siteId: site.id,
        employeeNumber: number,
        name,
        hiredOn,
        ...(leftOn === null ? {} : { leftOn }),
        // A job is one of a site: it does not move along.
        jobId:
          jobName === null
            ? isMove
              ? null
              : (before?.jobId ?? null)
            : (jobs.get(jobName) ?? null),
        employer: cells.choice(line, "employer", EMPLOYERS) ?? before?.employer ?? "own",
        employerName: cells.text(line, "employer_name") ?? before?.employerName ?? null,
        language:
          cells.choice(line, "language", Language.options) ?? before?.language ?? site.language,
      },
    );
    return {
      known: before,
      facts,
      crew: crewOf(line, before, facts),
      changes: before ? changesOf(before, facts) : [],
      leaves: leftOn !== null && leftOn !== before?.leftOn,
    };
  }

  function crewOf(line: CsvLine, before: Known | null, { hiredOn }: RosterFacts) {
    const name = cells.text(line, "crew");
    if (name === null) return null;
    const id = crews.get(name);
    if (id === undefined) return cells.refuse(line, "crew", "crew-unknown");
    const fromDate = line.cells.get("crew_from")
      ? cells.date(line, "crew_from")
      : before
        ? null
        : hiredOn;
    const own = before ? (memberships.get(before.id) ?? []) : [];
    const last = own.at(-1);
    if (
      last?.crewId === id &&
      last.toDate === null &&
      (fromDate === null || fromDate >= last.fromDate)
    )
      return null;
    if (fromDate === null) {
      cells.refuseUnlessRefused(line, "crew_from", "crew-day-needed", {});
      return null;
    }
    for (const { code, params } of dateIssues(["crew_from"], fromDate))
      cells.refuse(line, "crew_from", code, params);
    if (fromDate < hiredOn) return cells.refuse(line, "crew_from", "before-hire", { hiredOn });
    if (own.some((one) => one.fromDate >= fromDate))
      return cells.refuse(line, "crew_from", "crew-later-already");
    return { id, fromDate };
  }

  function check(
    line: CsvLine,
    field: string,
    found: readonly Parameters<typeof toProblemIssue>[0][] | undefined,
  ) {
    for (const one of found ?? []) {
      const { code, params } = toProblemIssue(one);
      cells.refuseUnlessRefused(line, field, code, params);
    }
  }
}

async function checkMissing(missing: readonly Known[], leftOn: string | null): Promise<void> {
  if (leftOn === null) return;
  const late = await daysAfterLeaving(missing.map(({ id }) => ({ id, leftOn })));
  const [first] = missing
    .flatMap(({ id, name }) => {
      const lastOn = late.get(id);
      return lastOn ? [{ name, lastOn }] : [];
    })
    .toSorted((a, b) => (a.lastOn < b.lastOn ? 1 : -1));
  if (first)
    throw unprocessable([
      issue(["missingLeftOn"], "missing-worked-after", { ...first, others: late.size - 1 }),
    ]);
}

function factsOf(before: Partial<Known>, put: Partial<RosterFacts>): RosterFacts {
  const { siteId, employeeNumber, name, hiredOn, leftOn, employer, employerName, language, jobId } =
    { ...before, ...put } as RosterFacts;
  return { siteId, employeeNumber, name, hiredOn, leftOn, employer, employerName, language, jobId };
}

const members = [
  ["name", ["name"]],
  ["employer", ["employer", "employerName"]],
  ["language", ["language"]],
  ["job", ["jobId"]],
  ["site", ["siteId"]],
  ["hired-on", ["hiredOn"]],
] as const satisfies readonly [RosterPerson["changes"][number], readonly (keyof RosterFacts)[]][];

const changesOf = (before: Known, after: RosterFacts): RosterPerson["changes"] =>
  members.flatMap(([word, names]) =>
    names.some((name) => before[name] !== after[name]) ? [word] : [],
  );

const WORKER = (
  isOurs: string,
) => `w.id, w.site_id AS "siteId", ${isOurs} AS "isOurs", w.employee_number AS "employeeNumber", w.name, w.hired_on::text AS "hiredOn",
  w.left_on::text AS "leftOn", w.employer, w.employer_name AS "employerName", w.language, w.job_id AS "jobId"`;

/** A number is one of the organization: it may be somebody's of a site that is not the reader's. */
async function knownWorkers(
  actor: Actor,
  siteId: string,
  numbers: readonly string[],
): Promise<Map<string, Known>> {
  const isOurs = `(w.site_id = :siteId OR ${actor.at("w.site_id", "officer") || "FALSE"}) AND ${visible(workerPolicy, actor, "w")}`;
  const found = await rows<Known>(
    `SELECT ${WORKER(`(${isOurs})`)} FROM workers w JOIN jsonb_array_elements_text(CAST(:numbers AS jsonb)) n ON n = w.employee_number
     ORDER BY w.id FOR NO KEY UPDATE OF w`,
    { siteId, numbers: JSON.stringify([...new Set(numbers)]) },
  );
  return new Map(found.map((worker) => [worker.employeeNumber, worker]));
}

const presentAt = (date: string) =>
  `w.site_id = :siteId AND w.hired_on <= ${date} AND (w.left_on IS NULL OR w.left_on > ${date})`;

async function presentWithout(
  siteId: string,
  date: string,
  numbers: readonly string[],
): Promise<Known[]> {
  return rows<Known>(
    `SELECT ${WORKER("TRUE")} FROM workers w WHERE ${presentAt("CAST(:date AS date)")}
       AND NOT EXISTS (SELECT 1 FROM jsonb_array_elements_text(CAST(:numbers AS jsonb)) n WHERE n = w.employee_number)
     ORDER BY w.id FOR NO KEY UPDATE OF w`,
    { siteId, date, numbers: JSON.stringify(numbers) },
  );
}

async function presentCount(siteId: string): Promise<number> {
  const [found] = await rows<{ count: number }>(
    `SELECT count(*)::int AS count FROM workers w WHERE ${presentAt("current_date")}`,
    { siteId },
  );
  return found?.count ?? 0;
}

async function idsAt(table: "jobs" | "crews", siteId: string): Promise<Map<string, string>> {
  const found = await rows<{ id: string; name: string }>(
    `SELECT id, name FROM ${table} WHERE site_id = :siteId AND NOT is_archived`,
    { siteId },
  );
  return new Map(found.map(({ id, name }) => [name.normalize("NFC"), id]));
}

interface Membership {
  workerId: string;
  crewId: string;
  fromDate: string;
  toDate: string | null;
}

/** Of each worker, loans left out, in the order of their dates. */
async function membershipsOf(workerIds: readonly string[]): Promise<Map<string, Membership[]>> {
  const found = await rows<Membership>(
    `SELECT worker_id AS "workerId", crew_id AS "crewId", lower(valid)::text AS "fromDate", (upper(valid) - 1)::text AS "toDate"
     FROM crew_memberships WHERE NOT is_loan AND worker_id = ANY (CAST(:ids AS uuid[])) ORDER BY lower(valid)`,
    { ids: `{${workerIds.join(",")}}` },
  );
  const byWorker = new Map<string, Membership[]>();
  for (const one of found) byWorker.set(one.workerId, [...(byWorker.get(one.workerId) ?? []), one]);
  return byWorker;
}
