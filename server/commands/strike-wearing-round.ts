import { recordAudit } from "../lib/audit";
import { rows } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { WearingRound } from "../models/shop-floor";
import { markDaysStale } from "./mark-days-stale";

/** A round made by mistake stays on record, struck, and says nothing of anybody any more. */
export async function strikeWearingRound(
  actor: Actor,
  round: WearingRound,
  reason: string,
): Promise<void> {
  if (round.struckReason !== null) throw new AppError("nothing-to-do", 409);
  await round.update({ struckReason: reason, revision: round.revision + 1 });
  await recordAudit(actor, {
    action: "strike-wearing-round",
    subjectKind: "wearing-round",
    subjectId: round.id,
    values: { reason },
  });
  const seen = await rows<{ workerId: string }>(
    `SELECT DISTINCT worker_id AS "workerId" FROM wearing_looks WHERE round_id = :id`,
    { id: round.id },
  );
  await markDaysStale(actor.organizationId, {
    workerIds: seen.map(({ workerId }) => workerId),
    fromDate: round.seenOn,
  });
}
