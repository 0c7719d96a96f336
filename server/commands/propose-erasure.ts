import type { ErasureInput, ErasureView } from "../../shared/schemas/retention";
import { recordAudit } from "../lib/audit";
import { execute, rows } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import { addJob } from "../lib/jobs";
import type { Actor } from "../lib/policy";
import { visibleFormerWorkers } from "../queries/retention";
import { approveProposal, withdrawProposal } from "./decide-proposal";

/** @throws AppError 422 with the place of each who is not due, is held, or stands in another proposal. */
export async function proposeErasure(
  actor: Actor,
  { siteId, workerIds }: ErasureInput,
): Promise<string> {
  const { organizationId, userId } = actor;
  const known = new Map(
    (await visibleFormerWorkers(actor, { siteId, ids: workerIds })).map((one) => [one.id, one]),
  );
  const isDue = (id: string) => known.get(id)?.keptBecause === null && !known.get(id)!.isProposed;
  const issues = workerIds.flatMap((id, place) =>
    isDue(id) ? [] : [issue(["workerIds", place], "not-erasable")],
  );
  if (issues.length > 0) throw unprocessable(issues);
  const [proposed] = await rows<{ id: string }>(
    "INSERT INTO erasures (organization_id, site_id, proposed_by) VALUES ($1, $2, $3) RETURNING id",
    [organizationId, siteId, userId],
  );
  const { id } = proposed!;
  const people = [...known.values()].map(({ id: workerId, keepUntil }) => ({
    workerId,
    keepUntil,
  }));
  await execute(
    `INSERT INTO erasure_people (erasure_id, organization_id, worker_id, keep_until)
     SELECT $1, $2, x."workerId", x."keepUntil" FROM jsonb_to_recordset($3::jsonb) AS x("workerId" uuid, "keepUntil" date)`,
    [id, organizationId, JSON.stringify(people)],
  );
  await recordAudit(actor, {
    action: "propose-erasure",
    subjectKind: "erasure",
    subjectId: id,
    values: { siteId, workerIds: people.map(({ workerId }) => workerId) },
  });
  return id;
}

export const queueErasure = (organizationId: string, erasureId: string) =>
  addJob("erase-people", { organizationId, erasureId }, { key: `erasure:${erasureId}` });

/**
 * Has it done. Nobody approves what they proposed.
 *
 * @throws AppError own-proposal, or wrong-state where it was decided already.
 */
export async function approveErasure(
  actor: Actor,
  { id }: Pick<ErasureView, "id">,
  proposedBy: string,
): Promise<void> {
  await approveProposal(actor, "erasures", id, proposedBy);
  await recordAudit(actor, {
    action: "approve-erasure",
    subjectKind: "erasure",
    subjectId: id,
    values: {},
  });
  await queueErasure(actor.organizationId, id);
}

/** @throws AppError wrong-state where it was decided already. */
export async function withdrawErasure(
  actor: Actor,
  { id }: Pick<ErasureView, "id">,
): Promise<void> {
  await withdrawProposal(actor, "erasures", id, ["proposed"]);
  await execute(
    "UPDATE erasure_people SET state = 'kept', kept_because = 'withdrawn', done_at = now() WHERE erasure_id = $1",
    [id],
  );
  await recordAudit(actor, {
    action: "withdraw-erasure",
    subjectKind: "erasure",
    subjectId: id,
    values: {},
  });
}
