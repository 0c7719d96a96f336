import type { z } from "zod";
import type { ReaderView, ReadFilter, ReadPage } from "../../shared/schemas/access";
import { decodeTimeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { inForce } from "../lib/grants";
import { type Actor, visible } from "../lib/policy";
import { readLogPolicy } from "../policies";

type Reader = Omit<ReaderView, "endsAt"> & { endsAt: Date | null };

const READERS = `SELECT u.id AS "userId", u.name, CASE WHEN g.year IS NULL THEN g.role ELSE 'visitor' END AS role,
    s.name AS "siteName", g.year, g.ends_at AS "endsAt", s.time_zone AS "timeZone", g.employer_name AS "employerName", %CREW% AS "crewName"
  FROM role_grants g JOIN users u ON u.id = g.user_id AND u.revoked_at IS NULL LEFT JOIN sites s ON s.id = g.site_id`;
const readers = (crew: string) => READERS.replace("%CREW%", crew);
const ORDER =
  "ORDER BY array_position(ARRAY['officer', 'supervisor', 'auditor', 'administrator', 'employer', 'visitor'], x.role), x.name, x.\"userId\", x.\"siteName\", x.\"crewName\"";

const present = (found: readonly Reader[]): ReaderView[] =>
  found.map(({ endsAt, ...reader }) => ({ ...reader, endsAt: endsAt?.toISOString() ?? null }));

/**
 * Everybody whom a grant in force lets read a worker's record today, as the policies of days and workers do: who is
 * named there has to be named here (tests/api/access.test.ts holds the two against each other).
 */
export async function readersOfWorker(workerId: string): Promise<ReaderView[]> {
  const ofSite = "(g.site_id IS NULL OR g.site_id = w.site_id)";
  return present(
    await rows<Reader>(
      `SELECT x.* FROM (
         ${readers("NULL::text")} CROSS JOIN workers w
         WHERE w.id = :workerId AND ${inForce("g")} AND (
           (g.role IN ('officer', 'auditor', 'administrator') AND g.year IS NULL AND ${ofSite})
           OR (g.year IS NOT NULL AND EXISTS (SELECT 1 FROM days v WHERE v.worker_id = w.id AND v.site_id = g.site_id
             AND v.date >= make_date(g.year, 1, 1) AND v.date <= make_date(g.year, 12, 31)))
           OR (g.role = 'employer' AND (g.site_id = w.site_id OR EXISTS (SELECT 1 FROM days v WHERE v.worker_id = w.id AND v.site_id = g.site_id))
             AND EXISTS (SELECT 1 FROM worker_employers e WHERE e.worker_id = w.id AND e.employer = g.employer_kind AND e.employer_name = g.employer_name)))
         UNION ALL
         SELECT DISTINCT u.id, u.name, 'supervisor', NULL::text, NULL::int,
           least(upper(m.valid), upper(v.valid))::timestamp AT TIME ZONE s.time_zone, s.time_zone, NULL::text, c.name
         FROM crew_memberships m JOIN crews c ON c.id = m.crew_id JOIN sites s ON s.id = c.site_id JOIN crew_supervisors v ON v.crew_id = c.id
           JOIN users u ON u.id = v.user_id AND u.revoked_at IS NULL
         WHERE m.worker_id = :workerId AND m.valid @> current_date AND v.valid @> current_date
           AND EXISTS (SELECT 1 FROM role_grants g WHERE g.user_id = u.id AND g.role = 'supervisor' AND ${inForce("g")})) x ${ORDER}`,
      { workerId },
    ),
  );
}

/** Who sees somebody's account and what they did here: administrators, and auditors by the trail. */
export async function readersOfAccount(): Promise<ReaderView[]> {
  return present(
    await rows<Reader>(
      `SELECT x.* FROM (${readers("NULL::text")} WHERE g.role IN ('administrator', 'auditor') AND g.year IS NULL AND ${inForce("g")}) x ${ORDER}`,
    ),
  );
}

/** Who read whose record, the latest first. */
export async function listReads(
  actor: Actor,
  filter: z.output<typeof ReadFilter>,
): Promise<z.input<typeof ReadPage>> {
  const before = decodeTimeCursor(filter.cursor);
  const conditions = [
    visible(readLogPolicy, actor, "r"),
    filter.workerId && "r.worker_id = :workerId",
    filter.readerId && "r.reader_id = :readerId",
    before && "(r.first_at, r.id) < (CAST(:at AS timestamptz), CAST(:id AS uuid))",
  ].filter(Boolean);
  const found = await rows<z.input<typeof ReadPage>["rows"][number]>(
    `SELECT r.id, r.reader_id AS "readerId", u.name AS "readerName", r.worker_id AS "workerId", w.name AS "workerName", s.name AS "siteName",
       s.time_zone AS "timeZone", r.year, r.kind, r.read_on::text AS "readOn", to_char(r.first_at AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.US"Z"') AS "firstAt"
     FROM record_reads r JOIN users u ON u.id = r.reader_id JOIN sites s ON s.id = r.site_id LEFT JOIN workers w ON w.id = r.worker_id
     WHERE ${conditions.join(" AND ")} ORDER BY r.first_at DESC, r.id DESC LIMIT :limit`,
    {
      workerId: filter.workerId,
      readerId: filter.readerId,
      at: before?.at ?? null,
      id: before?.id ?? null,
      limit: filter.limit + 1,
    },
  );
  return pageFrom(found, filter.limit, ({ firstAt, id }) => [firstAt, id]);
}
