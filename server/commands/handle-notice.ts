import { recordAudit } from "../lib/audit";
import { execute, rows } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { queueNotice } from "./schedule-notices";

export type NoticeAction = "hold" | "send-now";

/**
 * Holds back, or lets go at once, what an entry will tell people.
 *
 * @throws AppError notice-sent-already, where nothing of it can be held or sent any more.
 */
export async function handleNotices(
  actor: Actor,
  noticeIds: readonly string[],
  action: NoticeAction,
): Promise<void> {
  const ids = `{${noticeIds.join(",")}}`;
  const from = action === "hold" ? ["waiting"] : ["waiting", "held"];
  const found = await rows<{ id: string }>(
    "SELECT id FROM notices WHERE id = ANY (CAST(:ids AS uuid[])) AND state IN (:from) FOR UPDATE",
    { ids, from },
  );
  if (found.length === 0) throw new AppError("notice-sent-already", 409);
  const open = found.map(({ id }) => id);
  await execute(
    action === "hold"
      ? "UPDATE notices SET state = 'held', revision = revision + 1 WHERE id = ANY ($1::uuid[])"
      : "UPDATE notices SET state = 'waiting', not_before = now(), revision = revision + 1 WHERE id = ANY ($1::uuid[])",
    [open],
  );
  for (const id of open) {
    if (action === "send-now") await queueNotice(actor.organizationId, id, new Date());
    await recordAudit(actor, {
      action: `${action}-notice`,
      subjectKind: "notice",
      subjectId: id,
      values: {},
    });
  }
}
