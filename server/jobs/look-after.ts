import { escalateOverdue } from "../commands/escalate-overdue";
import { closeFitDues, closeLaidDownFits, openFitDues } from "../commands/follow-fits";
import { queueRecompute } from "../commands/mark-days-stale";
import { orderDigests } from "../commands/order-digests";
import { queueHistoryReading } from "../commands/order-history-reading";
import { orderTrailHeads } from "../commands/order-trail-heads";
import { queueErasure } from "../commands/propose-erasure";
import { queueNotice } from "../commands/schedule-notices";
import { queueCheck } from "../commands/start-microphone-check";
import { queueAnalysis } from "../commands/start-recording";
import { writeResultLetters } from "../commands/write-result-letters";
import { execute, inTransaction, organizationIds, rows, sequelize } from "../lib/db";
import { fileStore } from "../lib/file-store";
import { deleteAudioDue } from "./delete-audio";

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
      // Whoever reads a file says so every second; a minute of silence means that its process is gone.
      const silent = await rows<{ id: string }>(
        "SELECT id FROM history_imports WHERE state IN ('reading', 'storing') AND updated_at < now() - interval '1 minute'",
      );
      for (const { id } of silent) await queueHistoryReading(organizationId, id);
      const unanalysed = await rows<{ id: string }>(
        "SELECT id FROM recordings WHERE state IN ('uploaded', 'analysing') AND updated_at < now() - interval '1 minute'",
      );
      for (const { id } of unanalysed) await queueAnalysis(organizationId, id);
      const unchecked = await rows<{ id: string }>(
        "SELECT id FROM microphone_checks WHERE state = 'analysing' AND updated_at < now() - interval '1 minute'",
      );
      for (const { id } of unchecked) await queueCheck(organizationId, id);
      const unerased = await rows<{ id: string }>(
        "SELECT id FROM erasures WHERE state = 'approved' AND updated_at < now() - interval '1 minute'",
      );
      for (const { id } of unerased) await queueErasure(organizationId, id);
      await deleteAudioDue(organizationId);
      await openCalibrationFindings(organizationId);
      await closeLaidDownFits(organizationId);
      await closeFitDues(organizationId);
      await openFitDues(organizationId);
      await writeResultLetters(organizationId, new Date());
      await escalateOverdue(organizationId);
      await orderDigests(organizationId, new Date());
      await orderTrailHeads(organizationId, new Date());
      await execute("DELETE FROM idempotency_keys WHERE created_at < now() - interval '30 days'");
    });
  }
  await sequelize().query(
    "DELETE FROM sessions WHERE expire < now(); DELETE FROM rate_limits WHERE resets_at < now()",
    { transaction: null },
  );
  await fileStore().sweep();
}

/** Days before its laboratory calibration runs out on which an instrument becomes somebody's business. */
const CALIBRATION_NOTICE_DAYS = 14;

/**
 * One open finding per instrument whose calibration runs out; a new calibration date closes it. One that failed its
 * calibration has its own (record-calibration.ts), which a person closes.
 */
export async function openCalibrationFindings(organizationId: string): Promise<void> {
  await execute(
    `WITH due AS (
       INSERT INTO findings (organization_id, site_id, instrument_id, kind, state, facts, first_date, last_date, days_count, due_on)
       SELECT i.organization_id, i.site_id, i.id, 'instrument', 'new', jsonb_build_object('calibrationDueOn', i.calibration_due_on),
         current_date, current_date, 0, i.calibration_due_on
       FROM instruments i WHERE NOT i.is_archived AND i.calibration_due_on <= current_date + ${CALIBRATION_NOTICE_DAYS}
         AND NOT EXISTS (SELECT 1 FROM findings f WHERE f.instrument_id = i.id AND f.kind = 'instrument'
           AND (f.state <> 'closed' OR f.facts->>'calibrationDueOn' = i.calibration_due_on::text))
       RETURNING id, organization_id)
     INSERT INTO finding_steps (organization_id, finding_id, kind, to_state) SELECT organization_id, id, 'state', 'new' FROM due`,
  );
  await execute(
    `WITH mended AS (
       UPDATE findings f SET state = 'closed', closed_on = current_date, closing_reason = 'calibrated', revision = f.revision + 1
       FROM instruments i WHERE i.id = f.instrument_id AND f.organization_id = $1 AND f.kind = 'instrument' AND f.criterion = '' AND f.state <> 'closed'
         AND (i.is_archived OR i.calibration_due_on IS NULL OR i.calibration_due_on > current_date + ${CALIBRATION_NOTICE_DAYS})
       RETURNING f.id, f.organization_id)
     INSERT INTO finding_steps (organization_id, finding_id, kind, to_state, text) SELECT organization_id, id, 'state', 'closed', 'calibrated' FROM mended`,
    [organizationId],
  );
}
