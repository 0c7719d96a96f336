import type { HandOverInput } from "../../shared/schemas/hand-over";
import { recordAudit } from "../lib/audit";
import { execute, row } from "../lib/db";
import { AppError, forbidden, issue, stale, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Crew } from "../models/worker";
import { handOverDraft, handOverView } from "../queries/hand-overs";

/**
 * Hands a crew's open matters to the next in charge, frozen as whoever gives them saw them.
 *
 * @throws AppError stale, with what there is to hand over now, where the sheet has changed since
 */
export async function giveHandOver(
  actor: Actor,
  crew: Crew,
  { recipientId, note, fingerprint }: HandOverInput,
): Promise<string> {
  const draft = await handOverDraft(actor, crew);
  if (!draft.recipients.some(({ id }) => id === recipientId))
    throw unprocessable([issue(["recipientId"], "not-of-this-crew")]);
  if (draft.fingerprint !== fingerprint) throw stale(draft);
  const given = await row<{ id: string }>(
    `INSERT INTO hand_overs (organization_id, site_id, crew_id, sheet_date, content, note, author_id, recipient_id)
     VALUES (:organizationId, :siteId, :crewId, :sheetDate, CAST(:content AS jsonb), :note, :userId, :recipientId) RETURNING id`,
    {
      organizationId: actor.organizationId,
      siteId: crew.siteId,
      crewId: crew.id,
      sheetDate: draft.content.sheetDate,
      content: JSON.stringify(draft.content),
      note,
      userId: actor.userId,
      recipientId,
    },
  );
  if (!given) throw new Error("an inserted row has an id");
  await recordAudit(actor, {
    action: "give-hand-over",
    subjectKind: "hand-over",
    subjectId: given.id,
    values: { crewId: crew.id, recipientId, note },
  });
  return given.id;
}

/**
 * Whoever was given a hand-over says that they have read it.
 *
 * @throws AppError forbidden to anybody else, nothing-to-do a second time
 */
export async function receiveHandOver(actor: Actor, id: string): Promise<void> {
  const { canReceive, receivedAt } = await handOverView(actor, id);
  if (!canReceive) throw receivedAt ? new AppError("nothing-to-do", 409) : forbidden();
  await execute("INSERT INTO hand_over_receipts (hand_over_id, organization_id) VALUES ($1, $2)", [
    id,
    actor.organizationId,
  ]);
  await recordAudit(actor, {
    action: "receive-hand-over",
    subjectKind: "hand-over",
    subjectId: id,
    values: {},
  });
}
