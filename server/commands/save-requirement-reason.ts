import { execute, row } from "../lib/db";
import { type Actor, authorize } from "../lib/policy";
import { requirementPolicy } from "../policies";

/**
 * Why a worker has a personal requirement. It may be medical: it stands in its own table, and no event repeats it.
 * Returns whether it changed.
 */
export async function saveRequirementReason(
  actor: Actor,
  worker: { id: string; siteId: string },
  text: string | null,
): Promise<boolean> {
  authorize(requirementPolicy, actor, "change", worker);
  const reason = text || null;
  const before = await row<{ reason: string }>(
    "SELECT reason FROM worker_requirement_reasons WHERE worker_id = :id",
    {
      id: worker.id,
    },
  );
  if ((before?.reason ?? null) === reason) return false;
  if (reason === null) {
    await execute("DELETE FROM worker_requirement_reasons WHERE worker_id = $1", [worker.id]);
  } else {
    await execute(
      `INSERT INTO worker_requirement_reasons (worker_id, organization_id, reason, author_id) VALUES ($1, $2, $3, $4)
       ON CONFLICT (worker_id) DO UPDATE SET reason = excluded.reason, author_id = excluded.author_id, recorded_at = now()`,
      [worker.id, actor.organizationId, reason, actor.userId],
    );
  }
  return true;
}
