import type { NoticeAction } from "../../shared/schemas/notice";
import { recordAudit } from "../lib/audit";
import { execute, rows } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { queueNotice } from "./schedule-notices";

/** From which states each can be done, and what it makes of a notice. */
const ACTIONS: Readonly<Record<NoticeAction, { from: readonly string[]; set: string }>> = {
  hold: { from: ["waiting"], set: "state = 'held'" },
  "send-now": { from: ["waiting", "held"], set: "state = 'waiting', not_before = now()" },
  // Word for word, under a Message-ID of its own: a late report of the first mail says nothing of this one.
  "send-again": {
    from: ["bounced", "failed"],
    set: `state = 'waiting', not_before = now(), last_error = NULL, unknown_outcomes = 0, sent_at = NULL,
      message_id = '<' || id || '.' || (tries + 1) || '@dinward>'`,
  },
  "give-on-paper": { from: ["bounced", "failed", "possibly-sent"], set: "state = 'on-paper'" },
};

/**
 * Holds back, lets go at once, or tells in another way, what an entry tells people.
 *
 * @throws AppError notice-sent-already, where nothing of it can be held or sent any more.
 */
export async function handleNotices(
  actor: Actor,
  noticeIds: readonly string[],
  action: NoticeAction,
): Promise<void> {
  const ids = `{${noticeIds.join(",")}}`;
  const { from, set } = ACTIONS[action];
  const found = await rows<{ id: string }>(
    "SELECT id FROM notices WHERE id = ANY (CAST(:ids AS uuid[])) AND state IN (:from) FOR UPDATE",
    { ids, from: [...from] },
  );
  if (found.length === 0) throw new AppError("notice-sent-already", 409);
  const open = found.map(({ id }) => id);
  await execute(`UPDATE notices SET ${set}, revision = revision + 1 WHERE id = ANY ($1::uuid[])`, [
    open,
  ]);
  for (const id of open) {
    if (action === "send-now" || action === "send-again")
      await queueNotice(actor.organizationId, id, new Date());
    await recordAudit(actor, {
      action: `${action}-notice`,
      subjectKind: "notice",
      subjectId: id,
      values: {},
    });
  }
}
