import { randomUUID } from "node:crypto";
import { queueRecompute } from "../commands/mark-days-stale";
import { recomputeDays } from "../commands/recompute-days";
import { scheduleNotices } from "../commands/schedule-notices";
import { inTransaction, rows } from "../lib/db";

/** Small enough that the locks of one step hold nobody up. */
const STEP = 200;
/** After so many the job makes room for others and goes on as a new one. */
const STEPS_A_JOB = 50;

interface StaleDay {
  workerId: string;
  date: string;
  siteId: string;
}

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
      const days = await rows<StaleDay>(
        `SELECT worker_id AS "workerId", date::text AS date, site_id AS "siteId" FROM days WHERE is_stale ORDER BY date, worker_id LIMIT ${STEP}`,
      );
      if (days.length === 0) return 0;
      const recomputed = await recomputeDays(organizationId, days);
      const siteOf = new Map(
        days.map(({ workerId, date, siteId }) => [`${workerId} ${date}`, siteId]),
      );
      for (const siteId of new Set(siteOf.values())) {
        const ofSite = <T extends { workerId: string; date: string }>(all: T[]) =>
          all.filter(({ workerId, date }) => siteOf.get(`${workerId} ${date}`) === siteId);
        await scheduleNotices({
          organizationId,
          author: null,
          entryId: randomUUID(),
          siteId,
          recomputed: { days: ofSite(recomputed.days), opened: ofSite(recomputed.opened) },
        });
      }
      return days.length;
    });
    done += count;
    if (count < STEP) return done;
  }
  await inTransaction({ organizationId }, () => queueRecompute(organizationId));
  return done;
}
