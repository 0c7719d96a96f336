import type { z } from "zod";
import { actAtOnceCitation, tellWorkersCitation } from "../../shared/rule-sets/required-mails";
import {
  MAIL_KINDS,
  type MailChoiceView,
  type MailKind,
  OPTIONAL_MAILS,
  type SentFilter,
  type SentPage,
} from "../../shared/schemas/mail-choice";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { row, rows } from "../lib/db";
import type { Actor } from "../lib/policy";

/** The mails that the actor can get, and which of them are switched off; why the others can't be. */
export async function ownMails(actor: Actor): Promise<MailChoiceView> {
  const { userId, workerId } = actor;
  const chosen = await row<{ off: MailKind[]; revision: number }>(
    "SELECT off, revision FROM mail_choices WHERE user_id = :userId",
    { userId },
  );
  const place = await row<{ ruleSetKey: string | null; isNamed: boolean }>(
    `SELECT (SELECT x.governing_rule_set FROM site_settings x JOIN sites s ON s.id = x.site_id
       WHERE x.effective_from <= current_date AND (${siteOf(actor)}) ORDER BY s.name, x.effective_from DESC, x.number DESC LIMIT 1) AS "ruleSetKey",
       EXISTS (SELECT 1 FROM sites s WHERE s.escalation_user_id = :userId) AS "isNamed"`,
    { userId, workerId },
  );
  const ruleSetKey = place?.ruleSetKey ?? "";
  const isWorker = actor.is("worker") && workerId !== null;
  const gets: Record<MailKind, boolean> = {
    "own-results": isWorker,
    "own-limit": isWorker,
    "crew-limit": actor.is("officer", "supervisor"),
    overdue: place?.isNamed ?? false,
  };
  const citations: Partial<Record<MailKind, string | null>> = {
    "own-results": tellWorkersCitation(ruleSetKey),
    "crew-limit": actAtOnceCitation(ruleSetKey),
  };
  return {
    revision: chosen?.revision ?? 0,
    email: actor.email,
    rows: MAIL_KINDS.filter((kind) => gets[kind]).map((kind) => ({
      kind,
      isOn: !chosen?.off.includes(kind),
      isOptional: OPTIONAL_MAILS.includes(kind),
      citation: citations[kind] ?? null,
    })),
  };
}

/** SQL: the site whose rules say what somebody has to be told: the own as a worker, else the first in the own charge. */
const siteOf = (actor: Actor): string =>
  actor.workerId === null
    ? actor.at("s.id", "officer", "supervisor") || "FALSE"
    : "s.id = (SELECT w.site_id FROM workers w WHERE w.id = :workerId)";

/** What was sent to the actor, or written to them on paper, as it was sent, the latest first. */
export async function sentToMe(
  actor: Actor,
  { cursor, limit }: z.output<typeof SentFilter>,
): Promise<z.input<typeof SentPage>> {
  const before = decodeCursor(cursor, 2);
  const found = await rows<z.input<typeof SentPage>["rows"][number]>(
    `SELECT x.id, x.state, x.subject, x.text, to_char(x.at AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.US"Z"') AS at FROM (
       SELECT n.id, n.state, n.subject, n.body_text AS text, coalesce(n.sent_at, n.attempted_at, n.created_at) AS at FROM notices n
         WHERE n.recipient_id = :userId AND n.subject IS NOT NULL
       UNION ALL
       SELECT l.id, NULL, l.subject, l.body_text, l.written_at FROM result_letters l WHERE l.notice_id IS NULL AND ${actor.owns("l.worker_id") || "FALSE"}) x
     WHERE CAST(:at AS timestamptz) IS NULL OR (x.at, x.id) < (CAST(:at AS timestamptz), CAST(:id AS uuid))
     ORDER BY x.at DESC, x.id DESC LIMIT :limit`,
    { userId: actor.userId, at: before?.[0] ?? null, id: before?.[1] ?? null, limit: limit + 1 },
  );
  return pageFrom(found, limit, ({ at, id }) => [at, id]);
}
