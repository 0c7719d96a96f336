import type { z } from "zod";
import type {
  EmployerShareList,
  EmployerShareView,
  SharedResultFilter,
  SharedResultPage,
} from "../../shared/schemas/employer-share";
import { decodeTimeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { inForce } from "../lib/grants";
import { type Actor, visible } from "../lib/policy";
import { employerSharePolicy, sharedResultPolicy } from "../policies";

type Row = Omit<EmployerShareView, "endsAt"> & { endsAt: Date };

/** Grants that are over and are still listed, days. */
const LISTED_FOR_DAYS = 90;
const LIST_LIMIT = 500;

/** People of outside employers who read results of a site: those who may, then those whose time is over. */
export async function listEmployerShares(
  actor: Actor,
  { siteId = null, id = null }: { siteId?: string | null; id?: string | null },
): Promise<EmployerShareView[]> {
  const found = await rows<Row>(
    `SELECT x.* FROM (
     SELECT g.id, u.id AS "userId", u.name, u.email, g.employer_kind AS "employerKind", g.employer_name AS "employerName",
       s.id AS "siteId", s.name AS "siteName", s.time_zone AS "timeZone", b.name AS "grantedBy", least(g.ends_at, g.revoked_at, u.revoked_at) AS "endsAt",
       CASE WHEN NOT ${inForce("g")} OR u.revoked_at IS NOT NULL THEN 'over' WHEN u.last_sign_in_at > g.granted_at THEN 'here' ELSE 'expected' END AS state
     FROM role_grants g JOIN users u ON u.id = g.user_id JOIN sites s ON s.id = g.site_id LEFT JOIN users b ON b.id = g.granted_by
     WHERE g.role = 'employer' AND ${visible(employerSharePolicy, actor, "g")} AND (CAST(:id AS uuid) IS NULL OR g.id = :id)
       AND (CAST(:siteId AS uuid) IS NULL OR g.site_id = :siteId)
       AND (CAST(:id AS uuid) IS NOT NULL OR least(g.ends_at, g.revoked_at) > now() - interval '${LISTED_FOR_DAYS} days')) x
     ORDER BY x.state = 'over', x."employerName", CASE WHEN x.state <> 'over' THEN x."endsAt" END, x."endsAt" DESC, x.id LIMIT ${LIST_LIMIT}`,
    { siteId, id },
  );
  return found.map(({ endsAt, ...share }) => ({ ...share, endsAt: endsAt.toISOString() }));
}

/** Employers whose people are or were at a site, by what its workers' records say. */
export const outsideEmployers = (
  siteId: string,
): Promise<z.input<typeof EmployerShareList>["employers"]> =>
  rows(
    `SELECT DISTINCT e.employer AS kind, e.employer_name AS name FROM worker_employers e JOIN workers w ON w.id = e.worker_id
     WHERE w.site_id = :siteId AND e.employer <> 'own' AND e.employer_name IS NOT NULL ORDER BY name, kind LIMIT ${LIST_LIMIT}`,
    { siteId },
  );

const sharesOf = async ({ employerGrants }: Actor): Promise<SharedResultPage["shares"]> => {
  const found = await rows<Omit<SharedResultPage["shares"][number], "endsAt"> & { endsAt: Date }>(
    `SELECT g.id, g.employer_name AS "employerName", s.name AS "siteName", s.time_zone AS "timeZone", g.ends_at AS "endsAt"
     FROM role_grants g JOIN sites s ON s.id = g.site_id WHERE g.id = ANY (CAST(:ids AS uuid[])) AND ${inForce("g")} ORDER BY s.name, g.employer_name, g.id`,
    { ids: `{${employerGrants.map(({ id }) => id).join(",")}}` },
  );
  return found.map(({ endsAt, ...share }) => ({ ...share, endsAt: endsAt.toISOString() }));
};

/** Results that hold today, of the people of the reader's employer; the latest day first. */
export async function listSharedResults(
  actor: Actor,
  filter: z.output<typeof SharedResultFilter>,
): Promise<{ page: SharedResultPage; workerIds: string[] }> {
  const before = decodeTimeCursor(filter.cursor);
  const conditions = [
    visible(sharedResultPolicy, actor, "d"),
    filter.from && "d.date >= CAST(:from AS date)",
    filter.to && "d.date <= CAST(:to AS date)",
    before && "(d.date, r.id) < (CAST(:date AS date), CAST(:id AS uuid))",
  ].filter(Boolean);
  const found = await rows<SharedResultPage["rows"][number] & { workerId: string }>(
    `SELECT r.id AS "resultId", d.date::text AS date, w.id AS "workerId", w.name AS "workerName", w.employee_number AS "employeeNumber", s.name AS "siteName",
       r.outside_db AS "outsideDb", r.outside_bound AS "outsideBound", r.uncertainty_db AS "uncertaintyDb", r.verdict_outside AS "verdictOutside",
       coalesce(r.at_ear_counted_db, r.at_ear_db) AS "atEarDb",
       coalesce(r.at_ear_bound, CASE WHEN r.has_protector = 'no' THEN r.outside_bound ELSE 'exact' END) AS "atEarBound",
       r.verdict_at_ear AS "verdictAtEar", r.governing_rule_set AS "ruleSetKey"
     FROM days d JOIN day_results r ON r.id = d.current_result_id JOIN workers w ON w.id = d.worker_id JOIN sites s ON s.id = d.site_id
     WHERE ${conditions.join(" AND ")} ORDER BY d.date DESC, r.id DESC LIMIT :limit`,
    {
      from: filter.from,
      to: filter.to,
      date: before?.at ?? null,
      id: before?.id ?? null,
      limit: filter.limit + 1,
    },
  );
  const page = pageFrom(found, filter.limit, ({ date, resultId }) => [date, resultId]);
  return {
    page: {
      rows: page.rows.map(({ workerId: _, ...result }) => result),
      next: page.next,
      shares: await sharesOf(actor),
    },
    workerIds: [...new Set(page.rows.map(({ workerId }) => workerId))],
  };
}
