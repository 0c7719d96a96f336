import type { z } from "zod";
import type {
  ReplacementPage,
  StockFilter,
  StockMovePage,
  StockMoveView,
  StockRow,
} from "../../shared/schemas/stock";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, visible } from "../lib/policy";
import { fitPolicy, stockPolicy } from "../policies";

/** What a site has of each model, size and part; and how many devices are out with workers. */
export function stockAt(actor: Actor, siteId: string | null): Promise<StockRow[]> {
  return rows<StockRow>(
    `SELECT m.site_id AS "siteId", s.name AS "siteName", m.model_id AS "modelId", p.name AS "modelName", m.size, m.part,
       sum(m.quantity)::int AS quantity, max(m.moved_on)::text AS "lastMovedOn",
       CASE WHEN m.part = 'device' THEN (SELECT count(*)::int FROM protector_issues i WHERE i.site_id = m.site_id AND i.model_id = m.model_id
         AND i.size IS NOT DISTINCT FROM m.size AND i.ended_on IS NULL) ELSE 0 END AS "issuedCount"
     FROM stock_moves m JOIN sites s ON s.id = m.site_id JOIN protector_models p ON p.id = m.model_id
     WHERE ${visible(stockPolicy, actor, "m")} AND (CAST(:siteId AS uuid) IS NULL OR m.site_id = :siteId)
     GROUP BY m.site_id, s.name, m.model_id, p.name, m.size, m.part ORDER BY s.name, p.name, m.part, m.size NULLS FIRST`,
    { siteId },
  );
}

type Move = z.infer<typeof StockMoveView> & { createdAt: Date };

const SELECT_MOVES = `SELECT m.id, s.name AS "siteName", p.name AS "modelName", m.size, m.part, m.kind, m.quantity, m.moved_on::text AS "movedOn",
    m.note, w.name AS "workerName", u.name AS "authorName", m.created_at AS "createdAt"
  FROM stock_moves m JOIN sites s ON s.id = m.site_id JOIN protector_models p ON p.id = m.model_id
  LEFT JOIN protector_issues i ON i.id = m.issue_id LEFT JOIN workers w ON w.id = i.worker_id LEFT JOIN users u ON u.id = m.author_id`;

const present = ({ createdAt: _, ...move }: Move): z.infer<typeof StockMoveView> => move;

export async function listStockMoves(
  actor: Actor,
  filter: z.output<typeof StockFilter>,
): Promise<z.input<typeof StockMovePage>> {
  const cursor = decodeCursor(filter.cursor, 3);
  const conditions = [visible(stockPolicy, actor, "m")];
  if (filter.siteId) conditions.push("m.site_id = :siteId");
  if (cursor)
    conditions.push(
      "(m.moved_on, m.created_at, m.id) < (CAST(:beforeDate AS date), CAST(:before AS timestamptz), CAST(:beforeId AS uuid))",
    );
  const found = await rows<Move & { created: string }>(
    `SELECT x.*, x."createdAt"::text AS created FROM (${SELECT_MOVES} WHERE ${conditions.join(" AND ")}
       ORDER BY m.moved_on DESC, m.created_at DESC, m.id DESC LIMIT :limit) x`,
    {
      siteId: filter.siteId,
      beforeDate: cursor?.[0] ?? null,
      before: cursor?.[1] ?? null,
      beforeId: cursor?.[2] ?? null,
      limit: filter.limit + 1,
    },
  );
  const page = pageFrom(found, filter.limit, ({ movedOn, created, id }) => [movedOn, created, id]);
  return { ...page, rows: page.rows.map(({ created: _, ...move }) => present(move)) };
}

export const stockMove = async (id: string): Promise<z.infer<typeof StockMoveView>> =>
  present(only(await rows<Move>(`${SELECT_MOVES} WHERE m.id = :id`, { id })));

/** Cushions and tips due within a month, of devices that workers have, by the data of the model in force today. */
export async function replacementsDue(
  actor: Actor,
  filter: z.output<typeof StockFilter>,
): Promise<z.input<typeof ReplacementPage>> {
  const cursor = decodeCursor(filter.cursor, 3);
  const found = await rows<z.infer<typeof ReplacementPage>["rows"][number]>(
    `SELECT * FROM (
       SELECT i.id AS "issueId", i.worker_id AS "workerId", w.name AS "workerName", w.employee_number AS "employeeNumber", i.model_id AS "modelId",
         p.name AS "modelName", part.name AS part, last.on_date::text AS "lastChangedOn", (last.on_date + part.every_days)::text AS "dueOn"
       FROM protector_issues i JOIN workers w ON w.id = i.worker_id JOIN protector_models p ON p.id = i.model_id
       JOIN LATERAL (SELECT r.data FROM protector_model_revisions r WHERE r.model_id = i.model_id AND r.effective_from <= current_date
         ORDER BY r.effective_from DESC, r.number DESC LIMIT 1) d ON TRUE
       CROSS JOIN LATERAL (VALUES ('cushions', (d.data->>'cushionsEveryDays')::int), ('tips', (d.data->>'tipsEveryDays')::int)) part(name, every_days)
       CROSS JOIN LATERAL (SELECT coalesce(max(m.moved_on), i.issued_on) AS on_date FROM stock_moves m WHERE m.issue_id = i.id AND m.part = part.name AND m.kind = 'changed') last
       WHERE i.ended_on IS NULL AND part.every_days IS NOT NULL AND (w.left_on IS NULL OR w.left_on >= current_date)
         AND (CAST(:siteId AS uuid) IS NULL OR i.site_id = :siteId) AND ${visible(fitPolicy, actor, "i")}) due
     WHERE "dueOn"::date <= current_date + 31
       AND (CAST(:afterId AS text) IS NULL OR ("dueOn", "issueId"::text, part) > (:afterDue, :afterId, :afterPart))
     ORDER BY "dueOn", "issueId"::text, part LIMIT :limit`,
    {
      siteId: filter.siteId ?? null,
      afterDue: cursor?.[0] ?? null,
      afterId: cursor?.[1] ?? null,
      afterPart: cursor?.[2] ?? null,
      limit: filter.limit + 1,
    },
  );
  return pageFrom(found, filter.limit, ({ dueOn, issueId, part }) => [dueOn, issueId, part]);
}
