import type { RecordingFaults } from "../../shared/schemas/recording";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Recording } from "../models/survey";
import { queueAnalysis } from "./start-recording";

/**
 * An officer's word that a recording is good in spite of a fault. It is analysed anew with it.
 *
 * @throws AppError wrong-state where nothing is asked.
 */
export async function acceptRecordingFaults(
  actor: Actor,
  found: Recording,
  { accept, reason }: RecordingFaults,
): Promise<void> {
  if (found.state !== "asked") throw new AppError("wrong-state", 409);
  const accepted = [
    ...found.accepted.filter(({ code }) => !accept.includes(code)),
    ...[...new Set(accept)].map((code) => ({ code, reason })),
  ];
  await execute(
    `UPDATE recordings SET state = 'uploaded', accepted = $2::jsonb, failure = NULL, tries = 0, progress_pct = 0, updated_at = now(), revision = revision + 1 WHERE id = $1`,
    [found.id, JSON.stringify(accepted)],
  );
  await queueAnalysis(actor.organizationId, found.id);
  await recordAudit(actor, {
    action: "accept-recording-faults",
    subjectKind: "recording",
    subjectId: found.id,
    values: { accept, reason },
  });
}
