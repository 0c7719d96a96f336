import { createHash } from "node:crypto";
import type { z } from "zod";
import type { PageQuery } from "../../shared/schemas/common";
import type {
  HandOverContent,
  HandOverDraft,
  HandOverPage,
  HandOverView,
} from "../../shared/schemas/hand-over";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { inForce } from "../lib/grants";
import { only } from "../lib/only";
import { type Actor, visible } from "../lib/policy";
import type { Crew } from "../models/worker";
import { handOverPolicy } from "../policies";
import { stillAsked } from "./crew-orders";
import { crewSheet } from "./crew-sheet";

/** How far ahead somebody's time with a crew may begin for them to be its next supervisor. */
const SOON_DAYS = 14;

/** What there is to hand over now, with whom it can be given to. */
export async function handOverDraft(actor: Actor, crew: Crew): Promise<HandOverDraft> {
  const sheet = await crewSheet(actor, crew);
  const { date, rows: expected } = sheet.expected;
  const open = expected.flatMap((one) =>
    stillAsked(one).map(({ findingId, kind, facts, cannot }) => ({
      workerName: one.worker.name,
      findingId,
      kind,
      facts,
      cannot,
    })),
  );
  const ends = await absencesUntil(
    expected.filter(({ isAbsent }) => isAbsent).map(({ worker }) => worker.id),
    date,
  );
  const content: HandOverContent = {
    sheetDate: date,
    orders: open,
    absent: expected
      .filter(({ isAbsent }) => isAbsent)
      .map(({ worker }) => ({
        workerName: worker.name,
        untilDate: ends.has(worker.id) ? (ends.get(worker.id) ?? null) : date,
      })),
    loans: expected.flatMap(({ worker, lentTo, lentBy }) => [
      ...(lentTo ? [{ workerName: worker.name, way: "out" as const, ...lentTo }] : []),
      ...(lentBy ? [{ workerName: worker.name, way: "in" as const, ...lentBy }] : []),
    ]),
  };
  return {
    crew: { id: crew.id, name: crew.name, timeZone: sheet.crew.timeZone },
    content,
    fingerprint: createHash("sha256").update(JSON.stringify(content)).digest("hex"),
    recipients: await recipientsOf(actor, crew),
  };
}

/** Last days of absences that were said ahead; null: not known. */
async function absencesUntil(
  workerIds: readonly string[],
  date: string,
): Promise<Map<string, string | null>> {
  const found = await rows<{ workerId: string; untilDate: string | null }>(
    `SELECT worker_id AS "workerId", (upper(valid) - 1)::text AS "untilDate" FROM absence_spans
     WHERE worker_id = ANY (CAST(:ids AS uuid[])) AND valid @> CAST(:date AS date) AND NOT is_struck`,
    { ids: `{${workerIds.join(",")}}`, date },
  );
  return new Map(found.map(({ workerId, untilDate }) => [workerId, untilDate]));
}

async function recipientsOf(actor: Actor, crew: Crew): Promise<{ id: string; name: string }[]> {
  return rows(
    `SELECT u.id, u.name FROM users u WHERE u.revoked_at IS NULL AND u.id <> :userId AND (
       EXISTS (SELECT 1 FROM crew_supervisors s WHERE s.crew_id = :crewId AND s.user_id = u.id AND s.valid && daterange(current_date, current_date + ${SOON_DAYS}))
       OR EXISTS (SELECT 1 FROM role_grants g WHERE g.user_id = u.id AND g.role = 'officer' AND ${inForce("g")} AND (g.site_id IS NULL OR g.site_id = :siteId)))
     ORDER BY u.name, u.id`,
    { userId: actor.userId, crewId: crew.id, siteId: crew.siteId },
  );
}

interface Found extends Omit<HandOverView, "givenAt" | "receivedAt"> {
  givenAt: Date;
  /** To the microsecond, for the cursor. */
  place: string;
  receivedAt: Date | null;
}

const present = ({ place: _, givenAt, receivedAt, ...view }: Found): HandOverView => ({
  ...view,
  givenAt: givenAt.toISOString(),
  receivedAt: receivedAt?.toISOString() ?? null,
});

const find = (actor: Actor, where: string, given: Record<string, unknown>) =>
  rows<Found>(
    `SELECT h.id, h.content, h.note, a.name AS "byName", r.name AS "toName", h.given_at AS "givenAt", h.given_at::text AS place, t.received_at AS "receivedAt",
       h.recipient_id = :userId AND t.hand_over_id IS NULL AS "canReceive"
     FROM hand_overs h JOIN users a ON a.id = h.author_id JOIN users r ON r.id = h.recipient_id
     LEFT JOIN hand_over_receipts t ON t.hand_over_id = h.id
     WHERE ${visible(handOverPolicy, actor, "h")} AND ${where}`,
    { ...given, userId: actor.userId },
  );

/** @throws AppError not-found */
export async function handOverView(actor: Actor, id: string): Promise<HandOverView> {
  return present(only(await find(actor, "h.id = :id", { id })));
}

/** Hand-overs of a crew, the latest first. */
export async function listHandOvers(
  actor: Actor,
  crewId: string,
  { cursor, limit }: z.output<typeof PageQuery>,
): Promise<z.input<typeof HandOverPage>> {
  const before = decodeCursor(cursor, 2);
  const found = await find(
    actor,
    `h.crew_id = :crewId AND (CAST(:place AS timestamptz) IS NULL OR (h.given_at, h.id) < (CAST(:place AS timestamptz), CAST(:id AS uuid)))
     ORDER BY h.given_at DESC, h.id DESC LIMIT :most`,
    { crewId, place: before?.[0] ?? null, id: before?.[1] ?? null, most: limit + 1 },
  );
  const page = pageFrom(found, limit, ({ place, id }) => [place, id]);
  return { rows: page.rows.map(present), next: page.next };
}
