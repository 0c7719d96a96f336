import type { HoldInput, HoldView } from "../../shared/schemas/retention";
import { recordAudit } from "../lib/audit";
import { execute, rows } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";

/** From now on nobody of the site, or not this worker, is erased; what was approved stops at them. */
export async function placeHold(
  actor: Actor,
  { siteId, workerId, reason }: HoldInput,
): Promise<string> {
  const { organizationId, userId } = actor;
  if (workerId !== null) {
    const known = await rows(
      "SELECT 1 AS one FROM workers WHERE id = :workerId AND site_id = :siteId FOR SHARE",
      { workerId, siteId },
    );
    if (known.length === 0) throw unprocessable([issue(["workerId"], "not-a-worker-here")]);
  }
  const [placed] = await rows<{ id: string }>(
    `INSERT INTO legal_holds (organization_id, site_id, worker_id, reason, placed_by) VALUES ($1, $2, $3, $4, $5) RETURNING id`,
    [organizationId, siteId, workerId, reason, userId],
  );
  await recordAudit(actor, {
    action: "place-hold",
    subjectKind: "legal-hold",
    subjectId: placed!.id,
    values: { siteId, workerId, reason },
  });
  return placed!.id;
}

/** @throws AppError nothing-to-do where it was lifted already. */
export async function liftHold(actor: Actor, hold: HoldView, reason: string): Promise<void> {
  const lifted = await execute(
    `UPDATE legal_holds SET lifted_by = $2, lifted_at = now(), lifted_reason = $3, revision = revision + 1 WHERE id = $1 AND lifted_at IS NULL`,
    [hold.id, actor.userId, reason],
  );
  if (lifted === 0) throw new AppError("nothing-to-do", 409);
  await recordAudit(actor, {
    action: "lift-hold",
    subjectKind: "legal-hold",
    subjectId: hold.id,
    values: { reason },
  });
}
