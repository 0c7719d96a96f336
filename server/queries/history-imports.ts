import type { z } from "zod";
import type {
  HistoryImportFilter,
  HistoryImportPage,
  HistoryImportView,
  HistoryReport,
} from "../../shared/schemas/history";
import { localDate } from "../../shared/time/zone";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { row, rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import { isoInstant } from "../lib/sql-instant";
import { historyPolicy } from "../policies";
import { type FacingRun, facedShift } from "./faced-shifts";

type Found = z.infer<typeof HistoryImportPage>["rows"][number];

const FACTS = `m.id, m.site_id AS "siteId", s.time_zone AS "timeZone", m.instrument_id AS "instrumentId", i.name AS "instrumentName",
    i.serial_number AS "serialNumber", m.run_id AS "runId", coalesce(m.worker_id, r.worker_id) AS "workerId", w.name AS "workerName",
    m.file_name AS "fileName", m.size_bytes::float8 AS "sizeBytes", m.state, m.progress_pct AS "progressPct", m.mapping, m.answers,
    m.history_id AS "historyId", u.name AS "authorName", ${isoInstant("m.created_at")} AS "createdAt", m.revision`;
const TABLES = `history_imports m JOIN sites s ON s.id = m.site_id JOIN instruments i ON i.id = m.instrument_id
  LEFT JOIN runs r ON r.id = m.run_id LEFT JOIN workers w ON w.id = coalesce(m.worker_id, r.worker_id) LEFT JOIN users u ON u.id = m.author_id`;

export async function historyImportView(actor: Actor, id: string): Promise<HistoryImportView> {
  const found = only(
    await rows<Omit<HistoryImportView, "can" | "shift">>(
      `SELECT ${FACTS}, m.head, m.report FROM ${TABLES} WHERE m.id = :id`,
      { id },
    ),
  );
  const { report } = found;
  const shift =
    report === null || spanOf(report) === null
      ? null
      : await facedShift({ ...(await runOfImport(id, report)), span: spanOf(report) });
  return { ...found, shift, can: abilities(historyPolicy, actor, found) };
}

export const spanOf = ({
  startsAt,
  endsAt,
}: Pick<HistoryReport, "startsAt" | "endsAt">): { from: string; to: string } | null =>
  startsAt === null || endsAt === null ? null : { from: startsAt, to: endsAt };

export interface RunOfImport extends FacingRun {
  instrumentId: string;
  shiftId: string | null;
}

/**
 * The run that an import belongs to, or the one that it becomes: of the worker's shift that the file lies in most, or
 * else of the local day on which it begins.
 */
export async function runOfImport(
  importId: string,
  report: Pick<HistoryReport, "startsAt" | "endsAt">,
): Promise<RunOfImport> {
  const { timeZone, ...run } = only(
    await rows<Omit<RunOfImport, "date"> & { date: string | null; timeZone: string }>(
      `SELECT m.instrument_id AS "instrumentId", s.time_zone AS "timeZone", coalesce(r.worker_id, m.worker_id) AS "workerId", r.shift_id AS "shiftId",
         r.date::text AS date FROM history_imports m JOIN sites s ON s.id = m.site_id LEFT JOIN runs r ON r.id = m.run_id WHERE m.id = :importId`,
      { importId },
    ),
  );
  if (run.date !== null) return { ...run, date: run.date };
  const shift = await row<{ id: string; date: string }>(
    `SELECT id, date::text AS date FROM shifts
     WHERE worker_id = :workerId AND NOT is_void AND starts_at < CAST(:endsAt AS timestamptz) AND ends_at > CAST(:startsAt AS timestamptz)
     ORDER BY least(ends_at, CAST(:endsAt AS timestamptz)) - greatest(starts_at, CAST(:startsAt AS timestamptz)) DESC LIMIT 1`,
    { workerId: run.workerId, startsAt: report.startsAt, endsAt: report.endsAt },
  );
  const date = shift?.date ?? localDate(new Date(report.startsAt ?? 0), timeZone);
  return { ...run, shiftId: shift?.id ?? null, date };
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
