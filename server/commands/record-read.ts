import type { ReadKind } from "../../shared/schemas/access";
import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";

/**
 * Keeps that somebody read a part of a worker's record: the first time on a day by the site's clock, and no row after it.
 * Whoever reads the own record leaves none.
 */
export async function recordRead(actor: Actor, workerId: string, kind: ReadKind): Promise<void> {
  if (workerId === actor.workerId) return;
  await execute(
    `INSERT INTO record_reads (organization_id, reader_id, worker_id, site_id, kind, read_on)
     SELECT w.organization_id, $1, w.id, w.site_id, $3, (now() AT TIME ZONE s.time_zone)::date
     FROM workers w JOIN sites s ON s.id = w.site_id WHERE w.id = $2 ON CONFLICT DO NOTHING`,
    [actor.userId, workerId, kind],
  );
}

/** A file of a year shows everybody who has a day in it: one row for all of them. */
export async function recordYearRead(actor: Actor, siteId: string, year: number): Promise<void> {
  await execute(
    `INSERT INTO record_reads (organization_id, reader_id, site_id, year, kind, read_on)
     SELECT s.organization_id, $1, s.id, $3, 'export', (now() AT TIME ZONE s.time_zone)::date
     FROM sites s WHERE s.id = $2 ON CONFLICT DO NOTHING`,
    [actor.userId, siteId, year],
  );
}
