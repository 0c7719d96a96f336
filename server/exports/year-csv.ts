import { randomBytes } from "node:crypto";
import { pipeline } from "node:stream/promises";
import type { Response } from "express";
import pg from "pg";
import { to as copyTo } from "pg-copy-streams";
import { type Actor, visible } from "../lib/policy";
import { dayPolicy } from "../policies";
import { RecordEnds } from "./record-ends";
import { TRAILER, YEAR_COLUMNS } from "./year-columns";
import { type WorkersAs, workerSql } from "./year-tables";

interface YearExport {
  siteId: string;
  year: number;
  workers: WorkersAs;
}

const uuid = /^[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}$/;

/** The records of a year, as far as the actor may see them. COPY takes no parameters, so the values stand in the text. */
export function yearQuery(actor: Actor, { siteId, year, workers }: YearExport): string {
  if (!uuid.test(siteId) || !Number.isInteger(year))
    throw new RangeError("a site's id and a whole year");
  const worker = workerSql("w", { workers, salt: randomBytes(16).toString("hex") });
  const columns = YEAR_COLUMNS.map(({ name, sql, type }) => {
    const expression = name === "worker" ? worker : sql;
    return `${type === "text" ? `csv_text(${expression})` : expression} AS ${name}`;
  });
  return `SELECT ${columns.join(",\n  ")}
FROM days d
JOIN day_results r ON r.id = d.current_result_id
JOIN workers w ON w.id = d.worker_id
JOIN sites s ON s.id = d.site_id
LEFT JOIN crews c ON c.id = d.crew_id
LEFT JOIN tasks k ON k.id = r.deciding_task_id
WHERE d.site_id = '${siteId}' AND d.date >= '${year}-01-01' AND d.date <= '${year}-12-31' AND ${visible(dayPolicy, actor, "d")}
ORDER BY d.date, w.employee_number`;
}

/** The last record has as many fields as the others, so that a strict reader takes it. */
const trailerLine = (rows: number, columnCount: number) =>
  `${TRAILER},${rows}${",".repeat(columnCount - 2)}\r\n`;

/**
 * Passes the database's own COPY through to the response, under the application's role and row security. The last
 * record is written only when all others were: a file that breaks off ends without it, and its connection is cut.
 * When the reader goes away, the query ends with its connection.
 *
 * @returns how many records were written
 */
export async function streamRecords(
  databaseUrl: string,
  actor: Actor,
  { query, columnCount }: { query: string; columnCount: number },
  response: Response,
): Promise<number> {
  const client = new pg.Client({
    connectionString: databaseUrl,
    application_name: "dinward export",
  });
  const leave = () =>
    (
      client as unknown as { connection: { stream: { destroy(): void } } }
    ).connection.stream.destroy();
  // An error of the connection also fails the stream, which is where it is dealt with.
  client.on("error", () => undefined);
  await client.connect();
  response.on("close", leave);
  try {
    await client.query("BEGIN ISOLATION LEVEL REPEATABLE READ READ ONLY");
    // A backend still sorting would not notice that its reader has gone.
    await client.query(
      `SELECT set_config('app.organization', $1, true), set_config('client_connection_check_interval', '1s', true),
         set_config('statement_timeout', '30min', true), set_config('extra_float_digits', '1', true)`,
      [actor.organizationId],
    );
    const records = client.query(
      copyTo(`COPY (${query}) TO STDOUT WITH (FORMAT csv, HEADER true, ENCODING 'UTF8')`),
    );
    const ends = new RecordEnds();
    await pipeline(records, ends, response, { end: false });
    await client.query("COMMIT");
    if (records.rowCount !== ends.count - 1)
      throw new Error("the database wrote another number of rows than arrived");
    response.end(trailerLine(records.rowCount, columnCount));
    return records.rowCount;
  } catch (error) {
    if (response.headersSent) response.destroy();
    else response.removeHeader("content-disposition");
    throw error;
  } finally {
    response.off("close", leave);
    await client.end().catch(() => undefined);
  }
}

/** A site's year, as `streamRecords` passes it on. */
export const streamYear = (
  databaseUrl: string,
  actor: Actor,
  what: YearExport,
  response: Response,
): Promise<number> =>
  streamRecords(
    databaseUrl,
    actor,
    { query: yearQuery(actor, what), columnCount: YEAR_COLUMNS.length },
    response,
  );
