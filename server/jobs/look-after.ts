import { queueRecompute } from "../commands/mark-days-stale";
import { queueNotice } from "../commands/schedule-notices";
import { execute, inTransaction, organizationIds, rows, sequelize } from "../lib/db";

/**
 * What has to be looked after every minute, so that nothing depends on one process having lived: notices whose job was
 * lost with a process, stale days without a job, expired sessions, counters and keys.
 */
export async function lookAfter(): Promise<void> {
  for (const organizationId of await organizationIds()) {
    await inTransaction({ organizationId }, async () => {
      const lost = await rows<{ id: string }>(
        `SELECT id FROM notices WHERE (state = 'waiting' AND not_before < now() - interval '1 minute')
           OR (state = 'sending' AND attempted_at < now() - interval '3 minutes')
           OR (state = 'possibly-sent' AND unknown_outcomes < 2 AND attempted_at < now() - interval '3 minutes')`,
      );
      for (const { id } of lost) await queueNotice(organizationId, id, new Date());
      const [stale] = await rows<{ count: number }>(
        "SELECT count(*)::int AS count FROM (SELECT 1 FROM days WHERE is_stale LIMIT 1) d",
      );
      if (stale && stale.count > 0) await queueRecompute(organizationId);
      await execute("DELETE FROM idempotency_keys WHERE created_at < now() - interval '30 days'");
    });
  }
  await sequelize().query(
    "DELETE FROM sessions WHERE expire < now(); DELETE FROM rate_limits WHERE resets_at < now()",
    { transaction: null },
  );
}
