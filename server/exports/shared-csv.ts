import type { Response } from "express";
import { type Actor, visible } from "../lib/policy";
import { sharedResultPolicy } from "../policies";
import { YEAR_COLUMNS } from "./year-columns";
import { streamRecords } from "./year-csv";

/** Of a year's file, what the worker's employer reads: levels and verdicts, and no task and no reason. */
const SHARED = [
  "result_id",
  "site",
  "worker",
  "date",
  "rule_set",
  "rule_set_version",
  "lex_8h_db",
  "twa_db",
  "level_bound",
  "dose_pct",
  "expanded_u_db",
  "at_ear_off_db",
  "at_ear_bound",
  "at_ear_counted_db",
  "verdict_without_protection",
  "verdict_at_ear",
] as const;

const columns = [
  ...SHARED.map((name) => {
    const column = YEAR_COLUMNS.find((one) => one.name === name);
    if (!column) throw new Error(`a year's file has no column ${name}`);
    return { name, sql: column.type === "text" ? `csv_text(${column.sql})` : column.sql };
  }),
  { name: "worker_name", sql: "csv_text(w.name)" },
];

/** The results that the actor's employer grants open, the oldest day first. */
export const streamSharedResults = (
  databaseUrl: string,
  actor: Actor,
  response: Response,
): Promise<number> =>
  streamRecords(
    databaseUrl,
    actor,
    {
      query: `SELECT ${columns.map(({ name, sql }) => `${sql} AS ${name}`).join(",\n  ")}
FROM days d JOIN day_results r ON r.id = d.current_result_id JOIN workers w ON w.id = d.worker_id JOIN sites s ON s.id = d.site_id
WHERE ${visible(sharedResultPolicy, actor, "d")} ORDER BY d.date, w.employee_number`,
      columnCount: columns.length,
    },
    response,
  );
