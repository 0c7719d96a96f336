import type { z } from "zod";
import { createI18n, isLocale } from "../../shared/i18n";
import type { LetterFilter, LetterPage, LetterRow, LetterView } from "../../shared/schemas/letter";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { row, rows } from "../lib/db";
import { notFound } from "../lib/errors";
import { type Actor, abilities, visible } from "../lib/policy";
import { letterPolicy, ownLetterPolicy } from "../policies";

type Found = Omit<
  LetterView,
  "paper" | "can" | "worker" | "writtenAt" | "sentAt" | "acknowledged"
> & {
  workerId: string;
  workerName: string;
  employeeNumber: string;
  writtenAt: Date;
  sentAt: Date | null;
  way: "link" | "paper" | null;
  acknowledgedAt: Date | null;
  signedOn: string | null;
  recordedBy: string | null;
  organizationName: string;
  siteName: string;
};

/** The letter that took the place of `l`. */
export const LATER_LETTER = `LEFT JOIN LATERAL (SELECT r.id FROM result_letters r WHERE r.replaces_id = l.id ORDER BY r.written_at DESC LIMIT 1) later ON TRUE`;

/** The notice went; whether it arrived nobody knows where it is possibly sent. */
export const LETTER_STATE = `CASE WHEN later.id IS NOT NULL AND a.id IS NULL THEN 'replaced' WHEN a.id IS NOT NULL THEN 'acknowledged'
  WHEN l.notice_id IS NULL THEN 'to-print' WHEN n.state = 'withdrawn' THEN 'withdrawn' WHEN n.state IN ('failed', 'bounced') THEN 'failed'
  WHEN n.state IN ('sent', 'possibly-sent', 'on-paper') THEN 'sent' ELSE 'waiting' END`;

const LETTERS = `SELECT l.id, l.site_id AS "siteId", l.worker_id AS "workerId", w.name AS "workerName", w.employee_number AS "employeeNumber", ${LETTER_STATE} AS state,
    n.state AS "noticeState", l.due_on::text AS "dueOn", l.written_at AS "writtenAt", n.sent_at AS "sentAt",
    (${LETTER_STATE} IN ('to-print', 'waiting', 'failed') AND l.due_on < (now() AT TIME ZONE s.time_zone)::date) AS "isLate",
    (SELECT json_agg(json_build_object('date', x.date, 'levelDb', x.level_db, 'isOver', x.is_over) ORDER BY x.date) FROM result_letter_days x WHERE x.letter_id = l.id) AS days,
    a.way, a.recorded_at AS "acknowledgedAt", a.signed_on::text AS "signedOn", u.name AS "recordedBy",
    o.name AS "organizationName", s.name AS "siteName", l.language, l.subject, l.body_text AS text, l.replaces_id AS "replacesId", later.id AS "replacedById", l.rule_set AS "ruleSetKey", l.rule_set_version AS "ruleSetVersion"
  FROM result_letters l JOIN workers w ON w.id = l.worker_id JOIN sites s ON s.id = l.site_id JOIN organizations o ON o.id = l.organization_id LEFT JOIN notices n ON n.id = l.notice_id
  LEFT JOIN notice_acknowledgements a ON a.letter_id = l.id LEFT JOIN users u ON u.id = a.recorded_by
  ${LATER_LETTER}`;

/** What is neither acknowledged nor overtaken. */
const OPEN = `${LETTER_STATE} IN ('to-print', 'waiting', 'sent', 'failed')`;

function present(
  actor: Actor,
  {
    workerId,
    workerName,
    employeeNumber,
    way,
    acknowledgedAt,
    signedOn,
    recordedBy,
    writtenAt,
    sentAt,
    organizationName: _organization,
    siteName: _site,
    ...letter
  }: Found,
): Omit<LetterView, "paper"> {
  return {
    ...letter,
    worker: { id: workerId, name: workerName, employeeNumber },
    writtenAt: writtenAt.toISOString(),
    sentAt: sentAt?.toISOString() ?? null,
    acknowledged:
      way && acknowledgedAt
        ? { way, at: acknowledgedAt.toISOString(), signedOn, recordedBy }
        : null,
    can: abilities(letterPolicy, actor, letter),
  };
}

/** Letters of results, the soonest due first where they are open, else the latest first. */
export async function listLetters(
  actor: Actor,
  { show, siteId, cursor, limit }: z.output<typeof LetterFilter>,
): Promise<z.input<typeof LetterPage>> {
  const after = decodeCursor(cursor, 2);
  const isOpen = show === "open";
  const conditions = [visible(letterPolicy, actor, "l")];
  if (isOpen) conditions.push(OPEN);
  if (show === "acknowledged") conditions.push("a.id IS NOT NULL");
  if (siteId) conditions.push("l.site_id = :siteId");
  if (after)
    conditions.push(
      isOpen
        ? "(l.due_on, l.id) > (CAST(:dueOn AS date), CAST(:id AS uuid))"
        : "(l.due_on, l.id) < (CAST(:dueOn AS date), CAST(:id AS uuid))",
    );
  const order = isOpen ? "ASC" : "DESC";
  const found = await rows<Found>(
    `${LETTERS} WHERE ${conditions.join(" AND ")} ORDER BY l.due_on ${order}, l.id ${order} LIMIT ${limit + 1}`,
    { siteId, dueOn: after?.[0], id: after?.[1] },
  );
  const page = pageFrom(found, limit, ({ dueOn, id }) => [dueOn, id]);
  return { next: page.next, rows: page.rows.map((letter): LetterRow => present(actor, letter)) };
}

/** All letters of one worker, the latest first: the office's to read, and the worker's own. */
export async function lettersOfWorker(actor: Actor, workerId: string): Promise<LetterRow[]> {
  const found = await rows<Found>(
    `${LETTERS} WHERE l.worker_id = :workerId AND ${visible(ownLetterPolicy, actor, "l")} ORDER BY l.written_at DESC, l.id`,
    { workerId },
  );
  return found.map((letter) => present(actor, letter));
}

/** @throws AppError not-found */
export async function letterView(actor: Actor, id: string): Promise<LetterView> {
  const found = await row<Found>(
    `${LETTERS} WHERE l.id = :id AND ${visible(letterPolicy, actor, "l")}`,
    { id },
  );
  if (!found) throw notFound();
  const locale = isLocale(found.language) ? found.language : "en";
  return {
    ...present(actor, found),
    paper: {
      from: `${found.organizationName}, ${found.siteName}`,
      signature: (await createI18n(locale)).t("I have read this letter. Date and signature"),
    },
  };
}

/** Open letters that a person has to do something about: print, or see why they did not arrive in time. */
export async function lettersWaiting(
  actor: Actor,
  siteId: string | undefined,
): Promise<{ toPrint: number; late: number }> {
  const found = await row<{ toPrint: number; late: number }>(
    `SELECT count(*) FILTER (WHERE state IN ('to-print', 'failed'))::int AS "toPrint", count(*) FILTER (WHERE "isLate")::int AS late
     FROM (${LETTERS} WHERE l.due_on > current_date - 400 AND ${visible(letterPolicy, actor, "l")} ${siteId ? "AND l.site_id = :siteId" : ""}) x`,
    { siteId },
  );
  return found ?? { toPrint: 0, late: 0 };
}

export interface LetterHead {
  id: string;
  siteId: string;
  writtenAt: Date;
  timeZone: string;
}

/** @throws AppError not-found */
export async function findLetter(actor: Actor, id: string): Promise<LetterHead> {
  const found = await row<LetterHead>(
    `SELECT l.id, l.site_id AS "siteId", l.written_at AS "writtenAt", s.time_zone AS "timeZone" FROM result_letters l JOIN sites s ON s.id = l.site_id
     WHERE l.id = :id AND ${visible(letterPolicy, actor, "l")}`,
    { id },
  );
  if (!found) throw notFound();
  return found;
}
