import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { TrainingSession } from "../models/training";

/** A training entered by mistake trains nobody; it stays to be read with the reason. */
export async function strikeTraining(
  actor: Actor,
  session: TrainingSession,
  reason: string,
): Promise<void> {
  if (session.struckReason !== null) throw new AppError("nothing-to-do", 409);
  await execute(
    "UPDATE training_sessions SET struck_reason = $2, revision = revision + 1 WHERE id = $1",
    [session.id, reason],
  );
  await recordAudit(actor, {
    action: "strike-training",
    subjectKind: "training",
    subjectId: session.id,
    values: { title: session.title, heldOn: session.heldOn, reason },
  });
}
