import type { z } from "zod";
import type {
  HistoryImportFilter,
  HistoryImportPage,
  HistoryImportView,
} from "../../shared/schemas/history";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import { isoInstant } from "../lib/sql-instant";
import { historyPolicy } from "../policies";

type Found = Omit<HistoryImportView, "can" | "head" | "report">;

const FACTS = `m.id, m.site_id AS "siteId", s.time_zone AS "timeZone", m.instrument_id AS "instrumentId", i.name AS "instrumentName",
    i.serial_number AS "serialNumber", m.run_id AS "runId", coalesce(m.worker_id, r.worker_id) AS "workerId", w.name AS "workerName",
    m.file_name AS "fileName", m.size_bytes::float8 AS "sizeBytes", m.state, m.progress_pct AS "progressPct", m.mapping, m.answers,
    m.history_id AS "historyId", u.name AS "authorName", ${isoInstant("m.created_at")} AS "createdAt", m.revision`;
const TABLES = `history_imports m JOIN sites s ON s.id = m.site_id JOIN instruments i ON i.id = m.instrument_id
  LEFT JOIN runs r ON r.id = m.run_id LEFT JOIN workers w ON w.id = coalesce(m.worker_id, r.worker_id) LEFT JOIN users u ON u.id = m.author_id`;

export async function historyImportView(actor: Actor, id: string): Promise<HistoryImportView> {
  const found = only(
    await rows<Omit<HistoryImportView, "can">>(
      `SELECT ${FACTS}, m.head, m.report FROM ${TABLES} WHERE m.id = :id`,
      { id },
    ),
  );
  return { ...found, can: abilities(historyPolicy, actor, found) };
}

export async function listHistoryImports(
  actor: Actor,
  filter: z.output<typeof HistoryImportFilter>,
): Promise<z.input<typeof HistoryImportPage>> {
  const cursor = decodeCursor(filter.cursor, 2);
  const conditions = [visible(historyPolicy, actor, "m")];
  if (filter.siteId) conditions.push("m.site_id = :siteId");
  if (cursor)
    conditions.push(
      "(m.created_at, m.id) < (CAST(:before AS timestamptz), CAST(:beforeId AS uuid))",
    );
  const found = await rows<Found & { at: string }>(
    `SELECT ${FACTS}, m.created_at::text AS at FROM ${TABLES} WHERE ${conditions.join(" AND ")} ORDER BY m.created_at DESC, m.id DESC LIMIT :limit`,
    {
      siteId: filter.siteId,
      before: cursor?.[0] ?? null,
      beforeId: cursor?.[1] ?? null,
      limit: filter.limit + 1,
    },
  );
  const page = pageFrom(found, filter.limit, ({ at, id }) => [at, id]);
  return {
    ...page,
    rows: page.rows.map(({ at: _, ...one }) => ({
      ...one,
      can: abilities(historyPolicy, actor, one),
    })),
  };
}
