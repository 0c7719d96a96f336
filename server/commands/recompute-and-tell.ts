import { randomUUID } from "node:crypto";
import { recomputeDays } from "./recompute-days";
import { scheduleNotices } from "./schedule-notices";

export interface SiteDay {
  workerId: string;
  date: string;
  siteId: string;
}

/**
 * Computes days that a change of the programme has moved, and writes into the outbox whom their findings concern.
 *
 * @returns the entries under which notices may have been written, one a site
 */
export async function recomputeAndTell(
  organizationId: string,
  days: readonly SiteDay[],
): Promise<string[]> {
  const recomputed = await recomputeDays(organizationId, days);
  const siteOf = new Map(days.map(({ workerId, date, siteId }) => [`${workerId} ${date}`, siteId]));
  const entryIds: string[] = [];
  for (const siteId of new Set(siteOf.values())) {
    const ofSite = <T extends { workerId: string; date: string }>(all: T[]) =>
      all.filter(({ workerId, date }) => siteOf.get(`${workerId} ${date}`) === siteId);
    const entryId = randomUUID();
    entryIds.push(entryId);
    await scheduleNotices({
      organizationId,
      author: null,
      entryId,
      siteId,
      recomputed: { days: ofSite(recomputed.days), opened: ofSite(recomputed.opened) },
    });
  }
  return entryIds;
}
