import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";
import { recomputeDays } from "./recompute-days";
import { scheduleNotices } from "./schedule-notices";

/** The day that a worker's run belongs to, computed anew where a shift is there already; otherwise it waits for one. */
export async function recomputeRunDay(
  actor: Actor,
  {
    siteId,
    workerId,
    date,
    entryId,
  }: { siteId: string; workerId: string; date: string; entryId: string },
): Promise<void> {
  await execute("UPDATE days SET is_stale = TRUE WHERE worker_id = $1 AND date = $2::date", [
    workerId,
    date,
  ]);
  const recomputed = await recomputeDays(actor.organizationId, [{ workerId, date }]);
  await scheduleNotices({
    organizationId: actor.organizationId,
    author: actor,
    entryId,
    siteId,
    recomputed,
  });
}
