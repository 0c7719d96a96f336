import { recordAudit } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { execute, row } from "../lib/db";
import type { Actor } from "../lib/policy";
import type { Worker } from "../models/worker";

/** A worker's own report. While one is open, a further one is added to it as a comment: nothing that was said is lost. */
export async function reportProblem(actor: Actor, worker: Worker, text: string): Promise<string> {
  const site = await row<{ timeZone: string }>(
    `SELECT time_zone AS "timeZone" FROM sites WHERE id = :id`,
    { id: worker.siteId },
  );
  const today = todayAt(site?.timeZone ?? "UTC");
  const open = await row<{ id: string }>(
    "SELECT id FROM findings WHERE worker_id = :id AND kind = 'problem-reported' AND state <> 'closed' FOR UPDATE",
    { id: worker.id },
  );
  const id =
    open?.id ??
    (await row<{ id: string }>(
      `INSERT INTO findings (organization_id, site_id, worker_id, kind, state, facts, first_date, last_date, days_count, due_on)
     VALUES (:organizationId, :siteId, :workerId, 'problem-reported', 'new', CAST(:facts AS jsonb), :today, :today, 0, CAST(:today AS date) + 3) RETURNING id`,
      {
        organizationId: actor.organizationId,
        siteId: worker.siteId,
        workerId: worker.id,
        facts: JSON.stringify({ text }),
        today,
      },
    ))!.id;
  await execute(
    "INSERT INTO finding_steps (organization_id, finding_id, kind, from_state, to_state, text, author_id) VALUES ($1, $2, 'comment', $3, $4, $5, $6)",
    [actor.organizationId, id, open ? null : "new", open ? null : "new", text, actor.userId],
  );
  await recordAudit(actor, {
    action: "report-problem",
    subjectKind: "finding",
    subjectId: id,
    values: { text },
  });
  return id;
}
