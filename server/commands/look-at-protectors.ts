import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError, notFound } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { WorkplaceChange } from "../models/survey";
import { chosenBefore } from "../queries/chosen-before";

/**
 * Protectors chosen before a change were looked at, and are still right. What is assigned anew needs no look.
 *
 * @throws AppError not-found for one that does not wait for a look; nothing-to-do where the change is struck.
 */
export async function lookAtProtectors(
  actor: Actor,
  change: WorkplaceChange,
  assignmentIds: readonly string[],
): Promise<void> {
  if (change.struckReason !== null) throw new AppError("nothing-to-do", 409);
  const waiting = new Set((await chosenBefore(actor, change.id)).map(({ id }) => id));
  const ids = [...new Set(assignmentIds)];
  if (ids.some((id) => !waiting.has(id))) throw notFound();
  await execute(
    `INSERT INTO protectors_looked_at (organization_id, change_id, assignment_id, author_id) SELECT $1, $2, unnest($3::uuid[]), $4`,
    [actor.organizationId, change.id, ids, actor.userId],
  );
  await recordAudit(actor, {
    action: "look-at-protectors",
    subjectKind: "workplace-change",
    subjectId: change.id,
    values: { assignmentIds: ids },
  });
}
