import type { EntryNotices, NoticeRow } from "../../shared/schemas/notice";
import { row, rows } from "../lib/db";

interface Found extends Omit<NoticeRow, "notBefore" | "sentAt"> {
  notBefore: Date;
  sentAt: Date | null;
}

/** Notices with whom they are about; `condition` is on the notice `n`. */
export async function findNotices(
  condition: string,
  replacements: Record<string, unknown>,
  limit = 200,
): Promise<NoticeRow[]> {
  const found = await rows<Found>(
    `SELECT n.id, n.entry_id AS "entryId", u.name AS "recipientName", n.audience, n.state, n.not_before AS "notBefore", n.sent_at AS "sentAt", n.tries,
       n.last_error AS "lastError", n.replaces_id AS "replacesId", n.revision,
       coalesce((SELECT json_agg(json_build_object('id', w.id, 'name', w.name, 'date', g.date, 'kinds', g.kinds) ORDER BY w.name)
         FROM (SELECT i.worker_id, i.date, array_agg(DISTINCT f.kind) AS kinds FROM notice_items i JOIN findings f ON f.id = i.finding_id
               WHERE i.notice_id = n.id GROUP BY i.worker_id, i.date) g JOIN workers w ON w.id = g.worker_id), '[]') AS workers
     FROM notices n JOIN users u ON u.id = n.recipient_id WHERE ${condition} ORDER BY n.not_before, n.created_at, n.id LIMIT ${limit}`,
    replacements,
  );
  return found.map((row) => ({
    ...row,
    notBefore: row.notBefore.toISOString(),
    sentAt: row.sentAt?.toISOString() ?? null,
  }));
}

export async function entryNotices(entryId: string): Promise<EntryNotices> {
  const notices = await findNotices("n.entry_id = :entryId AND n.state <> 'withdrawn'", {
    entryId,
  });
  const correction = await row<{ at: Date | null }>(
    `SELECT max(coalesce(later.sent_at, later.attempted_at)) AS at FROM notices n JOIN notices later ON later.replaces_id = n.id
     WHERE n.entry_id = :entryId AND later.state IN ('sent', 'possibly-sent')`,
    { entryId },
  );
  return summarize(entryId, notices, correction?.at ?? null);
}

export function summarize(
  entryId: string,
  notices: NoticeRow[],
  correctedAt: Date | null = null,
): EntryNotices {
  const states = new Set(notices.map(({ state }) => state));
  const state =
    notices.length === 0
      ? "none"
      : states.size === 1 && states.has("held")
        ? "held"
        : states.has("waiting")
          ? "waiting"
          : states.has("held")
            ? "part"
            : "sent";
  return {
    entryId,
    state,
    notBefore:
      notices.find((notice) => notice.state === "waiting")?.notBefore ??
      notices[0]?.notBefore ??
      null,
    people: new Set(notices.map(({ recipientName }) => recipientName)).size,
    notices,
    correctedAt: correctedAt?.toISOString() ?? null,
  };
}
