import type { z } from "zod";
import type {
  DrawFilter,
  DrawnRecord,
  DrawPage,
  DrawRow,
  DrawView,
} from "../../shared/schemas/draw";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { row, rows } from "../lib/db";
import { notFound } from "../lib/errors";
import { type Actor, abilities, visible } from "../lib/policy";
import { drawPolicy } from "../policies";
import {
  DAY_FIGURES_COLUMNS,
  type DayFiguresRow,
  presentDayFigures,
} from "../presenters/day-figures";
import { LETTER_STATE } from "./letters";

type Found = Omit<DrawRow, "can" | "drawnAt" | "signed"> & {
  drawnAt: Date;
  signedBy: string | null;
  signedAt: Date | null;
  siteName: string;
  timeZone: string;
};

/** The mark of each record that counts. */
const lastMarks = (
  draw: string,
) => `SELECT DISTINCT ON (m.draw_id, m.position) m.draw_id, m.position, m.word, m.note, m.author_id, m.created_at
  FROM record_draw_marks m WHERE m.draw_id = ${draw} ORDER BY m.draw_id, m.position, m.number DESC`;

const SELECT_DRAWS = `SELECT d.id, d.site_id AS "siteId", d.year, d.seed, d.drawn_from AS "drawnFrom", encode(d.drawn_from_sha256, 'hex') AS "drawnFromSha256",
    (SELECT count(*)::int FROM record_draw_items i WHERE i.draw_id = d.id) AS records, x.marked, x.questions,
    1 + (SELECT count(*)::int FROM record_draw_marks m WHERE m.draw_id = d.id) + (g.draw_id IS NOT NULL)::int AS revision,
    u.name AS "authorName", d.created_at AS "drawnAt", v.name AS "signedBy", g.signed_at AS "signedAt", s.name AS "siteName", s.time_zone AS "timeZone"
  FROM record_draws d JOIN sites s ON s.id = d.site_id JOIN users u ON u.id = d.author_id
  LEFT JOIN record_draw_signatures g ON g.draw_id = d.id LEFT JOIN users v ON v.id = g.author_id
  CROSS JOIN LATERAL (SELECT count(*)::int AS marked, count(*) FILTER (WHERE k.word = 'question')::int AS questions FROM (${lastMarks("d.id")}) k) x`;

function present(
  actor: Actor,
  { drawnAt, signedBy, signedAt, siteName: _site, timeZone: _zone, ...draw }: Found,
): DrawRow {
  return {
    ...draw,
    drawnAt: drawnAt.toISOString(),
    signed: signedBy !== null && signedAt ? { by: signedBy, at: signedAt.toISOString() } : null,
    can: abilities(drawPolicy, actor, draw),
  };
}

/** Draws kept of a site's year, the latest first. */
export async function listDraws(
  actor: Actor,
  { siteId, year, cursor, limit }: z.output<typeof DrawFilter>,
): Promise<z.input<typeof DrawPage>> {
  const before = decodeCursor(cursor, 2);
  const found = await rows<Found>(
    `${SELECT_DRAWS} WHERE d.site_id = :siteId AND d.year = :year AND ${visible(drawPolicy, actor, "d")}
     ${before ? "AND (d.created_at, d.id) < (CAST(:at AS timestamptz), CAST(:id AS uuid))" : ""} ORDER BY d.created_at DESC, d.id DESC LIMIT ${limit + 1}`,
    { siteId, year, at: before?.[0], id: before?.[1] },
  );
  return pageFrom(
    found.map((draw) => present(actor, draw)),
    limit,
    ({ drawnAt, id }) => [drawnAt, id],
  );
}

/** @throws AppError not-found */
export async function findDraw(actor: Actor, id: string): Promise<DrawRow> {
  return present(actor, await found(actor, id));
}

async function found(actor: Actor, id: string): Promise<Found> {
  const draw = await row<Found>(
    `${SELECT_DRAWS} WHERE d.id = :id AND ${visible(drawPolicy, actor, "d")}`,
    { id },
  );
  if (!draw) throw notFound();
  return draw;
}

interface Item extends DayFiguresRow {
  position: number;
  workerId: string;
  workerName: string;
  employeeNumber: string;
  grade: string;
  methodVersion: number;
  computedAt: Date;
  isCurrent: boolean;
  markWord: NonNullable<DrawnRecord["mark"]>["word"] | null;
  note: string | null;
  markedBy: string | null;
  markedAt: Date | null;
}

type Lines = Pick<DrawnRecord, "runs" | "levels" | "notices" | "letters" | "findings">;

/**
 * A draw with each record's whole line: what it rests on with its field checks, the result, who was told, what had to be
 * done, and how it was marked. A fixed number of statements.
 *
 * @throws AppError not-found
 */
export async function drawView(actor: Actor, id: string): Promise<z.input<typeof DrawView>> {
  const draw = await found(actor, id);
  const items = await rows<Item>(
    `SELECT i.position, ${DAY_FIGURES_COLUMNS("r")}, r.worker_id AS "workerId", w.name AS "workerName", w.employee_number AS "employeeNumber", r.grade,
       r.method_version AS "methodVersion", r.computed_at AS "computedAt", coalesce(d.current_result_id = r.id, FALSE) AS "isCurrent",
       k.word AS "markWord", k.note, u.name AS "markedBy", k.created_at AS "markedAt"
     FROM record_draw_items i JOIN day_results r ON r.id = i.result_id JOIN workers w ON w.id = r.worker_id
     LEFT JOIN days d ON d.worker_id = r.worker_id AND d.date = r.date
     LEFT JOIN (${lastMarks(":id")}) k ON k.position = i.position LEFT JOIN users u ON u.id = k.author_id
     WHERE i.draw_id = :id ORDER BY i.position`,
    { id },
  );
  const lines = await rows<Lines & { position: number }>(
    `SELECT i.position,
       (SELECT coalesce(json_agg(json_build_object('id', m.id, 'date', m.date, 'instrumentName', n.name, 'durationMin', v.duration_min,
            'checkBeforeDb', v.check_before_db, 'checkAfterDb', v.check_after_db, 'keptReason', v.kept_reason) ORDER BY m.date, m.id), '[]')
          FROM run_revisions v JOIN runs m ON m.id = v.run_id JOIN instruments n ON n.id = m.instrument_id
          WHERE v.id IN (SELECT (x #>> '{}')::uuid FROM jsonb_path_query(r.refs, '$.shifts[*].runRevisionIds[*]') x)) AS runs,
       (SELECT coalesce(json_agg(json_build_object('taskId', t.id, 'taskName', t.name, 'from', l.effective_from) ORDER BY t.name, l.id), '[]')
          FROM task_levels l JOIN tasks t ON t.id = l.task_id
          WHERE l.id IN (SELECT (x #>> '{}')::uuid FROM jsonb_path_query(r.refs, '$.shifts[*].tasks[*].levelId') x WHERE jsonb_typeof(x) = 'string')) AS levels,
       (SELECT coalesce(json_agg(DISTINCT jsonb_build_object('id', n.id, 'name', u.name, 'state', n.state, 'at', n.sent_at)), '[]')
          FROM notice_items x JOIN notices n ON n.id = x.notice_id JOIN users u ON u.id = n.recipient_id WHERE x.worker_id = i.worker_id AND x.date = i.date) AS notices,
       (SELECT coalesce(json_agg(json_build_object('id', l.id, 'state', ${LETTER_STATE}, 'dueOn', l.due_on) ORDER BY l.written_at), '[]')
          FROM result_letter_days x JOIN result_letters l ON l.id = x.letter_id LEFT JOIN notices n ON n.id = l.notice_id
          LEFT JOIN notice_acknowledgements a ON a.letter_id = l.id
          LEFT JOIN LATERAL (SELECT e.id FROM result_letters e WHERE e.replaces_id = l.id LIMIT 1) later ON TRUE
          WHERE x.worker_id = i.worker_id AND x.date = i.date) AS letters,
       (SELECT coalesce(json_agg(json_build_object('id', f.id, 'kind', f.kind, 'state', f.state) ORDER BY f.opened_at, f.id), '[]')
          FROM findings f WHERE f.id IN (SELECT e.finding_id FROM finding_evidence e WHERE e.worker_id = i.worker_id AND e.date = i.date)) AS findings
     FROM record_draw_items i JOIN day_results r ON r.id = i.result_id WHERE i.draw_id = :id ORDER BY i.position`,
    { id },
  );
  return {
    ...present(actor, draw),
    siteName: draw.siteName,
    timeZone: draw.timeZone,
    rows: items.map((item, index) => {
      const { runs, levels, notices, letters, findings } = lines[index]!;
      return {
        position: item.position,
        worker: { id: item.workerId, name: item.workerName, employeeNumber: item.employeeNumber },
        figures: presentDayFigures(item),
        grade: item.grade,
        methodVersion: item.methodVersion,
        computedAt: item.computedAt.toISOString(),
        isCurrent: item.isCurrent,
        runs,
        levels,
        notices,
        letters,
        findings,
        mark:
          item.markWord === null
            ? null
            : {
                word: item.markWord,
                note: item.note ?? "",
                authorName: item.markedBy ?? "",
                at: item.markedAt?.toISOString() ?? "",
              },
      };
    }),
  };
}
