import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";

/** Whoever opens a draw reads one result of each worker in it. */
export async function recordDrawRead(actor: Actor, drawId: string): Promise<void> {
  await execute(
    `INSERT INTO record_reads (organization_id, reader_id, worker_id, site_id, kind, read_on)
     SELECT DISTINCT w.organization_id, $1::uuid, w.id, w.site_id, 'result', (now() AT TIME ZONE s.time_zone)::date
     FROM record_draw_items i JOIN workers w ON w.id = i.worker_id JOIN sites s ON s.id = w.site_id
     WHERE i.draw_id = $2 AND w.id IS DISTINCT FROM $3::uuid ON CONFLICT DO NOTHING`,
    [actor.userId, drawId, actor.workerId],
  );
}
