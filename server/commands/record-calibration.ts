import { randomUUID } from "node:crypto";
import type { CalibrationInput } from "../../shared/schemas/outing";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { execute, row } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Instrument } from "../models/instrument";
import { calibrationHistory } from "../queries/calibrations";

/** When somebody has to have looked at what hangs on a failed calibration. Common practice, no source. */
const LOOK_WITHIN_DAYS = 7;

/**
 * What the laboratory said. The latest one states until when the instrument is good; one that it failed opens a finding
 * for what was measured with it since it was last known to be right.
 */
export async function recordCalibration(
  actor: Actor,
  instrument: Instrument,
  site: { timeZone: string },
  input: CalibrationInput,
): Promise<void> {
  const today = todayAt(site.timeZone);
  const issues = [
    ...dateIssues(["doneOn"], input.doneOn),
    ...dateIssues(["dueOn"], input.dueOn, 3660),
  ];
  if (input.doneOn > today) issues.push(issue(["doneOn"], "in-the-future", { today }));
  if (input.dueOn !== null && input.dueOn <= input.doneOn)
    issues.push(issue(["dueOn"], "ends-before-start"));
  if (issues.length > 0) throw unprocessable(issues);
  const latest = await row<{ doneOn: string | null }>(
    `SELECT max(done_on)::text AS "doneOn" FROM instrument_calibrations WHERE instrument_id = :id`,
    { id: instrument.id },
  );
  await execute(
    `INSERT INTO instrument_calibrations (organization_id, instrument_id, done_on, has_passed, found_error_db, due_on, certificate_file_id, note, author_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9)`,
    [
      actor.organizationId,
      instrument.id,
      input.doneOn,
      input.hasPassed,
      input.foundErrorDb,
      input.dueOn,
      input.certificateFileId,
      input.note,
      actor.userId,
    ],
  );
  await recordAudit(actor, {
    action: "record-calibration",
    subjectKind: "instrument",
    subjectId: instrument.id,
    values: { ...input },
  });
  const isLatest = !latest?.doneOn || latest.doneOn <= input.doneOn;
  if (!isLatest) return;
  // From a failure on it has no certificate: its day is that of the failure.
  const calibrationDueOn = input.hasPassed ? input.dueOn : input.doneOn;
  await instrument.update({ calibrationDueOn, revision: instrument.revision + 1 });
  if (!input.hasPassed) await openFailureFinding(actor, instrument, input.doneOn, today);
}

async function openFailureFinding(
  actor: Actor,
  instrument: Instrument,
  failedOn: string,
  today: string,
): Promise<void> {
  const { inDoubt } = await calibrationHistory(actor, instrument.id);
  const facts = JSON.stringify({
    calibrationFailedOn: failedOn,
    serialNumber: instrument.serialNumber,
    runsCount: inDoubt.length,
    resultsCount: inDoubt.reduce((sum, { resultsCount }) => sum + resultsCount, 0),
  });
  const updated = await execute(
    `UPDATE findings SET facts = $2::jsonb, last_date = $3, revision = revision + 1
     WHERE instrument_id = $1 AND kind = 'instrument' AND criterion = 'calibration-failed' AND state <> 'closed'`,
    [instrument.id, facts, failedOn],
  );
  if (updated > 0) return;
  const id = randomUUID();
  await execute(
    `INSERT INTO findings (id, organization_id, site_id, instrument_id, kind, criterion, state, facts, first_date, last_date, days_count, due_on)
     VALUES ($1, $2, $3, $4, 'instrument', 'calibration-failed', 'new', $5::jsonb, $6, $6, 0, $7::date + ${LOOK_WITHIN_DAYS})`,
    [id, actor.organizationId, instrument.siteId, instrument.id, facts, failedOn, today],
  );
  await execute(
    "INSERT INTO finding_steps (organization_id, finding_id, kind, to_state) VALUES ($1, $2, 'state', 'new')",
    [actor.organizationId, id],
  );
  await recordAudit(actor, {
    action: "open-finding",
    subjectKind: "finding",
    subjectId: id,
    values: { kind: "instrument", criterion: "calibration-failed", date: failedOn },
  });
}
