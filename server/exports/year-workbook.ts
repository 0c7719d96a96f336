import { once } from "node:events";
import type { Writable } from "node:stream";
import { pipeline } from "node:stream/promises";
import { parse } from "csv-parse";
import excel from "exceljs";
import { to as copyTo } from "pg-copy-streams";
import { row } from "../lib/db";
import { only } from "../lib/only";
import type { Actor } from "../lib/policy";
import { trailHead } from "../queries/trail-check";
import type { YearColumn } from "./year-columns";
import { readYear } from "./year-snapshot";
import { tableQuery, type YearRecords, type YearTable, yearTables } from "./year-tables";

/** What a sheet holds at most, its head included. */
const SHEET_ROWS = 1_048_576;
/** What a cell holds at most; a longer text is cut, and says so. */
const CELL_LETTERS = 32_767;
const CUT = "… (cut: the ZIP has all of it)";
const ROWS_AT_ONCE = 200;

type Value = string | number | boolean | null;

/** A field of the CSV as a cell: numbers and truths as such, all else as text, nothing where it is empty. */
function cellOf(field: string, type: YearColumn["type"]): Value {
  if (field === "") return null;
  if (type === "number" || type === "integer") return Number(field);
  if (type === "boolean") return field === "true";
  return field.length <= CELL_LETTERS ? field : field.slice(0, CELL_LETTERS - CUT.length) + CUT;
}

class Sheets {
  private readonly workbook: excel.stream.xlsx.WorkbookWriter;

  constructor(
    private readonly out: Writable,
    private readonly rowsPerSheet: number,
  ) {
    this.workbook = new excel.stream.xlsx.WorkbookWriter({
      stream: out,
      useSharedStrings: false,
      useStyles: false,
    });
  }

  /** One table on as many sheets as it takes, each with the head. */
  async add(
    name: string,
    head: readonly string[],
    records: AsyncIterable<readonly Value[]> | Iterable<readonly Value[]>,
  ): Promise<void> {
    let number = 1;
    let sheet = this.open(name, head);
    let count = 1;
    for await (const record of records) {
      if (count === this.rowsPerSheet) {
        sheet.commit();
        number += 1;
        sheet = this.open(`${name} ${number}`, head);
        count = 1;
      }
      sheet.addRow(record).commit();
      count += 1;
      if (count % ROWS_AT_ONCE === 0) await this.room(sheet);
    }
    sheet.commit();
    await this.room(sheet);
  }

  async end(): Promise<void> {
    await this.workbook.commit();
  }

  private open(name: string, head: readonly string[]): excel.Worksheet {
    const sheet = this.workbook.addWorksheet(name, { views: [{ state: "frozen", ySplit: 1 }] });
    sheet.addRow(head).commit();
    return sheet;
  }

  /** Waits until what was written has gone on: the package itself would hold all of it. */
  private async room(sheet: excel.Worksheet): Promise<void> {
    if (this.out.destroyed) throw new Error("the reader has gone");
    const { stream } = sheet as unknown as { stream: { pipes: Writable[] } };
    const [next] = stream.pipes;
    if (!next?.writableNeedDrain) return;
    const gone = new AbortController();
    const leave = () => gone.abort();
    this.out.once("close", leave);
    try {
      await once(next, "drain", { signal: gone.signal });
    } finally {
      this.out.off("close", leave);
    }
  }
}

/** What each column means, on a sheet of its own. */
const columnsOf = (tables: readonly YearTable[]): Value[][] =>
  tables.flatMap(({ name, columns }) =>
    columns.map((column) => [name, column.name, column.unit, column.type, column.meaning]),
  );

/**
 * A site's year as a workbook, written while it is read, from one state of the database: the same tables and columns as in the
 * ZIP, each on a sheet of its own and on more where it is longer than one. It can't be checked offline as the ZIP can.
 */
export function streamYearWorkbook(
  actor: Actor,
  asked: YearRecords,
  madeAt: Date,
  out: Writable,
  rowsPerSheet = SHEET_ROWS,
): Promise<void> {
  const { organizationId } = actor;
  return readYear(organizationId, async (client) => {
    const named = await row<{ organization: string; site: string; timeZone: string }>(
      `SELECT csv_text(o.name) AS organization, csv_text(s.name) AS site, s.time_zone AS "timeZone"
         FROM sites s JOIN organizations o ON o.id = s.organization_id WHERE s.id = :siteId`,
      { siteId: asked.siteId },
    );
    const { organization, site, timeZone } = only(named ? [named] : []);
    const head = await trailHead(organizationId);
    const sheets = new Sheets(out, rowsPerSheet);
    const tables = yearTables(actor, asked);
    await sheets.add(
      "about",
      ["what", "value"],
      [
        ["organization", organization],
        ["site", site],
        ["time zone", timeZone],
        ["year", asked.year],
        ["workers shown as", asked.workers],
        ["made at", madeAt.toISOString()],
        ["trail, last seal", head?.number ?? null],
        ["trail, its SHA-256", head?.hash ?? null],
      ],
    );
    await sheets.add("columns", ["table", "column", "unit", "type", "meaning"], columnsOf(tables));
    for (const table of tables) {
      const types = table.columns.map(({ type }) => type);
      const names = table.columns.map(({ name }) => name);
      const records = client.query(
        copyTo(`COPY (${tableQuery(table)}) TO STDOUT WITH (FORMAT csv, ENCODING 'UTF8')`),
      );
      try {
        await pipeline(records, parse(), async (parsed: AsyncIterable<string[]>) => {
          await sheets.add(table.name, names, cells(parsed, types));
        });
      } catch (error) {
        // What nobody reads any more runs out, or the connection would wait for its reader for ever.
        records.resume();
        throw error;
      }
    }
    await sheets.end();
  });
}

async function* cells(
  records: AsyncIterable<string[]>,
  types: readonly YearColumn["type"][],
): AsyncGenerator<Value[]> {
  for await (const record of records)
    yield record.map((field, index) => cellOf(field, types[index]!));
}
