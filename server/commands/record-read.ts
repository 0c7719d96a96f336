import type { ReadKind } from "../../shared/schemas/access";
import { execute } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { sharedResultPolicy } from "../policies";

/**
 * Keeps that somebody read a part of a worker's record: the first time on a day by the site's clock, and no row after it.
 * Whoever reads the own record leaves none.
 */
export const recordRead = (actor: Actor, workerId: string, kind: ReadKind): Promise<void> =>
  recordReads(actor, [workerId], kind);

/** The same of several workers on one page. */
export async function recordReads(
  actor: Actor,
  workerIds: readonly string[],
  kind: ReadKind,
): Promise<void> {
  const others = workerIds.filter((workerId) => workerId !== actor.workerId);
  if (others.length === 0) return;
  await execute(
    `INSERT INTO record_reads (organization_id, reader_id, worker_id, site_id, kind, read_on)
     SELECT w.organization_id, $1, w.id, w.site_id, $3, (now() AT TIME ZONE s.time_zone)::date
     FROM workers w JOIN sites s ON s.id = w.site_id WHERE w.id = ANY ($2::uuid[]) ON CONFLICT DO NOTHING`,
    [actor.userId, `{${others.join(",")}}`, kind],
  );
}

/** A file of what is shared with an employer shows everybody of its people who has a result in it. */
export async function recordSharedReads(actor: Actor): Promise<void> {
  await execute(
    `INSERT INTO record_reads (organization_id, reader_id, worker_id, site_id, kind, read_on)
     SELECT DISTINCT w.organization_id, $1::uuid, w.id, w.site_id, 'result', (now() AT TIME ZONE s.time_zone)::date
     FROM days d JOIN workers w ON w.id = d.worker_id JOIN sites s ON s.id = w.site_id
     WHERE d.current_result_id IS NOT NULL AND w.id IS DISTINCT FROM $2::uuid AND ${visible(sharedResultPolicy, actor, "d")} ON CONFLICT DO NOTHING`,
    [actor.userId, actor.workerId],
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
