import type { Writable } from "node:stream";
import { stringify } from "csv-stringify/sync";
import { guardFormula } from "../../shared/format/csv";
import { rows } from "../lib/db";
import type { Actor } from "../lib/policy";
import { listReads } from "../queries/access";
import { listFindings } from "../queries/finding-view";
import { listFitTests } from "../queries/fit-tests";
import { listIssues } from "../queries/issues";
import { lettersOfWorker } from "../queries/letters";
import { workerTraining } from "../queries/training";
import { ownReports } from "../queries/wearing-rounds";
import { workerHistory } from "../queries/worker-history";
import type { WorkerDetailRow } from "../queries/workers";
import { ZipStream } from "./zip-stream";

const PAGE_ROWS = 200;

type Row = Record<string, unknown>;
type Page = { rows: readonly object[]; next: string | null };

async function allOf(page: (cursor: string | undefined) => Promise<Page>): Promise<Row[]> {
  const all: Row[] = [];
  let cursor: string | undefined;
  do {
    const { rows: found, next } = await page(cursor);
    all.push(...(found as readonly Row[]));
    cursor = next ?? undefined;
  } while (cursor);
  return all;
}

/** What a form would need of a row is no part of a record. */
const OF_FORMS: ReadonlySet<string> = new Set(["can", "revision", "canChange", "changeableUntil"]);

const plain = (row: object): Row =>
  Object.fromEntries(Object.entries(row).filter(([name]) => !OF_FORMS.has(name)));

/** What is no single value is JSON. */
function cell(value: unknown): string | number | null {
  if (value === null || value === undefined) return null;
  if (typeof value === "number") return value;
  if (typeof value === "boolean") return value ? "true" : "false";
  return guardFormula(typeof value === "string" ? value : JSON.stringify(value));
}

const columnName = (name: string) => name.replace(/[A-Z]/g, (letter) => `_${letter.toLowerCase()}`);

function csv(records: readonly Row[]): string {
  const names = [...new Set(records.flatMap((record) => Object.keys(record)))];
  return stringify(
    [names.map(columnName), ...records.map((record) => names.map((name) => cell(record[name])))],
    { bom: true, record_delimiter: "\r\n" },
  );
}

export interface OwnRecord {
  worker: Row;
  tables: Readonly<Record<string, readonly Row[]>>;
}

/**
 * All that is on record of the actor as a worker, as far as the actor's own pages show it: figures as they are stored, not
 * rounded. Needs a transaction of one state.
 */
export async function ownRecord(
  actor: Actor,
  worker: WorkerDetailRow,
  timeZone: string,
): Promise<OwnRecord> {
  const { id: workerId } = worker;
  const paged = (cursor: string | undefined) => ({ workerId, cursor, limit: PAGE_ROWS });
  const letterTexts = await rows<{ id: string; subject: string; text: string }>(
    "SELECT id, subject, body_text AS text FROM result_letters WHERE worker_id = :workerId",
    { workerId },
  );
  const textOf = new Map(letterTexts.map((letter) => [letter.id, letter]));
  const { assignments, ...person } = worker;
  const tables: Record<string, readonly object[]> = {
    days: await allOf((cursor) => workerHistory(actor, workerId, { cursor, limit: PAGE_ROWS })),
    shifts: await ownShifts(workerId),
    protectors: assignments,
    "handed-out": await allOf((cursor) => listIssues(actor, { ...paged(cursor), state: "all" })),
    "fit-tests": await allOf((cursor) => listFitTests(actor, paged(cursor))),
    findings: (await allOf((cursor) => listFindings(actor, { ...paged(cursor), state: "all" })))
      // What they come to today is no part of the record.
      .map(({ today: _, ...finding }) => finding),
    letters: (await lettersOfWorker(actor, workerId)).map((letter) => ({
      ...letter,
      ...textOf.get(letter.id),
    })),
    notices: await ownNotices(actor),
    trainings: (await workerTraining(actor, workerId)).rows,
    "said-of-wearing": await ownReports({ id: workerId, timeZone }, "1900-01-01"),
    "read-by": await allOf((cursor) => listReads(actor, { workerId, cursor, limit: PAGE_ROWS })),
  };
  return {
    worker: plain(person),
    tables: Object.fromEntries(
      Object.entries(tables).map(([name, records]) => [name, records.map(plain)]),
    ),
  };
}

/** What was worked and how long it was worn, a row for each task of a shift as it stands now. */
const ownShifts = (workerId: string) =>
  rows<Row>(
    `SELECT s.date::text AS date, to_char(v.local_start, 'HH24:MI') AS "localStart", v.length_min AS "shiftMin", t.name AS task, x.duration_min AS "durationMin", x.worn_pct AS "wornPct"
     FROM shifts s JOIN shift_revisions v ON v.id = s.current_revision_id JOIN shift_tasks x ON x.shift_revision_id = v.id JOIN tasks t ON t.id = x.task_id
     WHERE s.worker_id = :workerId AND NOT s.is_void ORDER BY s.date DESC, v.local_start, x.position`,
    { workerId },
  );

/** Mails to the worker, as they went. */
const ownNotices = ({ userId }: Actor) =>
  rows<Row>(
    `SELECT id, kind, state, subject, body_text AS text, to_char(sent_at AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS"Z"') AS "sentAt"
     FROM notices WHERE recipient_id = :userId AND audience = 'worker' AND subject IS NOT NULL ORDER BY created_at DESC`,
    { userId },
  );

/** The record as a ZIP: all of it in one JSON, and each table for a spreadsheet. */
export async function writeOwnRecord(
  { worker, tables }: OwnRecord,
  madeAt: Date,
  out: Writable,
): Promise<void> {
  const zip = new ZipStream(out, madeAt);
  const whole = { format: 1, madeAt: madeAt.toISOString(), worker, ...tables };
  await zip.add("record.json", [Buffer.from(`${JSON.stringify(whole, null, 1)}\n`)]);
  for (const [name, records] of Object.entries(tables))
    await zip.add(`${name}.csv`, [Buffer.from(csv(records))]);
  await zip.end();
}
