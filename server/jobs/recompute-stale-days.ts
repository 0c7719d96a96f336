import { queueRecompute } from "../commands/mark-days-stale";
import { recomputeAndTell, type SiteDay } from "../commands/recompute-and-tell";
import { inTransaction, rows } from "../lib/db";

/** Small enough that the locks of one step hold nobody up. */
const STEP = 200;
/** After so many the job makes room for others and goes on as a new one. */
const STEPS_A_JOB = 50;

/**
 * Works through an organization's stale days, oldest first, a step a transaction: a restart goes on where it stopped.
 *
 * @returns how many days were computed
 */
export async function recomputeStaleDays(
  organizationId: string,
  shouldStop: () => boolean = () => false,
): Promise<number> {
  let done = 0;
  for (let step = 0; step < STEPS_A_JOB && !shouldStop(); step += 1) {
    const count = await inTransaction({ organizationId }, async () => {
      const days = await rows<SiteDay>(
        `SELECT worker_id AS "workerId", date::text AS date, site_id AS "siteId" FROM days WHERE is_stale ORDER BY date, worker_id LIMIT ${STEP}`,
      );
      if (days.length === 0) return 0;
      await recomputeAndTell(organizationId, days);
      return days.length;
    });
    done += count;
    if (count < STEP) return done;
  }
  await inTransaction({ organizationId }, () => queueRecompute(organizationId));
  return done;
}
