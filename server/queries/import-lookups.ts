import { rows } from "../lib/db";
import { groupBy } from "../lib/group-by";

export interface ImportWorker {
  id: string;
  employeeNumber: string;
  hiredOn: string;
  leftOn: string | null;
}

/** Workers of a site by employee number; those whom one of its crews has or had on loan are among them. */
export async function workersByNumber(
  siteId: string,
  numbers: Iterable<string>,
): Promise<Map<string, ImportWorker>> {
  const found = await rows<ImportWorker>(
    `SELECT w.id, w.employee_number AS "employeeNumber", w.hired_on::text AS "hiredOn", w.left_on::text AS "leftOn"
     FROM workers w JOIN jsonb_array_elements_text(CAST(:numbers AS jsonb)) n ON n = w.employee_number
     WHERE w.site_id = :siteId OR EXISTS (SELECT 1 FROM crew_memberships m JOIN crews c ON c.id = m.crew_id WHERE m.worker_id = w.id AND c.site_id = :siteId)`,
    { siteId, numbers: JSON.stringify([...new Set(numbers)]) },
  );
  return new Map(found.map((worker) => [worker.employeeNumber, worker]));
}

export async function idsByName(
  table: "tasks" | "crews",
  siteId: string,
): Promise<Map<string, string>> {
  const found = await rows<{ id: string; name: string }>(
    `SELECT id, name FROM ${table} WHERE site_id = :siteId`,
    { siteId },
  );
  return new Map(found.map(({ id, name }) => [name.normalize("NFC"), id]));
}

interface Membership {
  workerId: string;
  crewId: string;
  fromDate: string;
  /** The last day, or null. */
  toDate: string | null;
  isLoan: boolean;
}

/** The crew of a site with which a worker was on a date, a loan last; by the memberships of that date. */
export async function crewOn(
  siteId: string,
  workerIds: Iterable<string>,
): Promise<(workerId: string, date: string) => string | null> {
  const found = await rows<Membership>(
    `SELECT m.worker_id AS "workerId", m.crew_id AS "crewId", lower(m.valid)::text AS "fromDate", (upper(m.valid) - 1)::text AS "toDate", m.is_loan AS "isLoan"
     FROM crew_memberships m JOIN crews c ON c.id = m.crew_id
     WHERE c.site_id = :siteId AND m.worker_id = ANY (CAST(:ids AS uuid[])) ORDER BY m.is_loan, lower(m.valid) DESC`,
    { siteId, ids: `{${[...new Set(workerIds)].join(",")}}` },
  );
  const byWorker = groupBy(found, ({ workerId }) => workerId);
  return (workerId, date) =>
    byWorker
      .get(workerId)
      ?.find(({ fromDate, toDate }) => fromDate <= date && (toDate === null || date <= toDate))
      ?.crewId ?? null;
}
