import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { MicrophoneCheck } from "../models/fit";
import { dropCheckAudio } from "./store-check-analysis";

/**
 * Gives a check up. Whatever is at work on it finds that out at its next step; its audio goes, and the line stays.
 *
 * @throws AppError wrong-state once it is analysed, kept, failed or cancelled.
 */
export async function cancelMicrophoneCheck(actor: Actor, check: MicrophoneCheck): Promise<void> {
  if (check.state !== "analysing") throw new AppError("wrong-state", 409);
  await execute(
    "UPDATE microphone_checks SET state = 'cancelled', progress_pct = 0, updated_at = now(), revision = revision + 1 WHERE id = $1",
    [check.id],
  );
  await dropCheckAudio(actor.organizationId, check.id);
  await recordAudit(actor, {
    action: "cancel-microphone-check",
    subjectKind: "microphone-check",
    subjectId: check.id,
    values: { workerId: check.workerId },
  });
}
