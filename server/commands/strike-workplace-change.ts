import { recordAudit } from "../lib/audit";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { WorkplaceChange } from "../models/survey";

/** An entry made by mistake stays on the register, struck, and asks for nothing any more. */
export async function strikeWorkplaceChange(
  actor: Actor,
  change: WorkplaceChange,
  reason: string,
): Promise<void> {
  if (change.struckReason !== null) throw new AppError("nothing-to-do", 409);
  await change.update({ struckReason: reason, revision: change.revision + 1 });
  await recordAudit(actor, {
    action: "strike-workplace-change",
    subjectKind: "workplace-change",
    subjectId: change.id,
    values: { reason },
  });
}
