import type { DrawRow, MarkInput } from "../../shared/schemas/draw";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError, notFound } from "../lib/errors";
import type { Actor } from "../lib/policy";

/** One at a time marks a draw or signs it off, until the transaction ends. */
export async function lockDraw(id: string): Promise<void> {
  await execute("SELECT pg_advisory_xact_lock(hashtextextended('draw:' || $1, 0))", [id]);
}

/**
 * Marks one drawn record; an earlier mark of it stays to be read and counts no more.
 *
 * @throws AppError wrong-state once the draw is signed off, not-found where nothing stands at that place.
 */
export async function markDrawn(
  actor: Actor,
  draw: DrawRow,
  { position, word, note }: MarkInput,
): Promise<void> {
  if (draw.signed) throw new AppError("wrong-state", 409);
  const marked = await execute(
    `INSERT INTO record_draw_marks (organization_id, draw_id, position, number, word, note, author_id)
     SELECT i.organization_id, i.draw_id, i.position,
       1 + (SELECT count(*) FROM record_draw_marks m WHERE m.draw_id = i.draw_id AND m.position = i.position), $3, $4, $5
     FROM record_draw_items i WHERE i.draw_id = $1 AND i.position = $2`,
    [draw.id, position, word, note, actor.userId],
  );
  if (marked === 0) throw notFound();
  await recordAudit(actor, {
    action: "mark-drawn-record",
    subjectKind: "draw",
    subjectId: draw.id,
    values: { position, word, note },
  });
}

/**
 * Signs a draw off as it was seen, with every record marked. Nothing of it changes afterwards.
 *
 * @throws AppError wrong-state where a record is not marked yet, or it is signed off already.
 */
export async function signDraw(actor: Actor, draw: DrawRow): Promise<void> {
  if (draw.signed || draw.marked < draw.records) throw new AppError("wrong-state", 409);
  const { id, records, questions } = draw;
  await execute(
    `INSERT INTO record_draw_signatures (organization_id, draw_id, records, questions, author_id) VALUES ($1, $2, $3, $4, $5)`,
    [actor.organizationId, id, records, questions, actor.userId],
  );
  await recordAudit(actor, {
    action: "sign-draw",
    subjectKind: "draw",
    subjectId: id,
    values: { records, questions },
  });
}
