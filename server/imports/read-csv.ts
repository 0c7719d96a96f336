import { Readable } from "node:stream";
import { finished } from "node:stream/promises";
import { type Info, parse } from "csv-parse";
import { parse as parseAtOnce } from "csv-parse/sync";
import type { ImportIssue } from "../../shared/schemas/import";
import { AppError } from "../lib/errors";
import type { ImportColumn } from "./columns";

type Delimiter = "," | ";" | "\t";

export interface CsvLine {
  line: number;
  /** Cells by column, trimmed, without the apostrophe that an export puts before a formula. */
  cells: ReadonlyMap<string, string>;
}

export interface CsvFile {
  delimiter: Delimiter;
  lines: CsvLine[];
  issues: ImportIssue[];
}

/** One record as the parser gives it, with its text. */
interface CsvRecord {
  record: string[];
  raw: string;
  info: Info;
}

const headerName = (cell: string) =>
  cell
    .trim()
    .toLowerCase()
    .replace(/[\s-]+/g, "_");

/** The delimiter under which the header has most of the columns. */
function delimiterOf(text: string, names: ReadonlySet<string>): Delimiter {
  const header = /^\uFEFF?([^\r\n]*)/.exec(text)?.[1] ?? "";
  const known = (delimiter: string) =>
    header.split(delimiter).filter((cell) => names.has(headerName(cell.replaceAll('"', ""))))
      .length;
  const [best] = ([",", ";", "\t"] as const).toSorted((a, b) => known(b) - known(a));
  return best!;
}

/** As `csv_text` in the database guards a formula. */
const unguarded = (cell: string) => (/^'[=+@\t\r-]/.test(cell) ? cell.slice(1) : cell);

function headerIssues(header: readonly string[], columns: readonly ImportColumn[]): ImportIssue[] {
  const issues: ImportIssue[] = [];
  const add = (field: string, code: string) => issues.push({ line: 1, field, code, params: {} });
  const known = new Set(columns.map(({ name }) => name));
  header.forEach((name, index) => {
    if (!known.has(name)) add(name, "column-unknown");
    else if (header.indexOf(name) < index) add(name, "column-twice");
  });
  for (const { name, isRequired } of columns)
    if (isRequired && !header.includes(name)) add(name, "column-missing");
  return issues;
}

/** The pieces in which a text goes to the parser, so that a large one holds nobody else up for long. */
function* pieces(text: string): Generator<string> {
  for (let from = 0; from < text.length; from += 65_536) yield text.slice(from, from + 65_536);
}

/**
 * A quoted cell that goes on after its closing mark, so that nobody knows where it ends. A mark within a cell that is not
 * quoted (`3" pipe`, `=SUM("A1")`) is plain text.
 */
function isQuoteBroken(raw: string, delimiter: Delimiter): boolean {
  if (!raw.includes('"')) return false;
  try {
    parseAtOnce(raw, { delimiter, relax_column_count: true });
    return false;
  } catch (error) {
    return (error as { code?: string }).code === "CSV_INVALID_CLOSING_QUOTE";
  }
}

/**
 * The lines of a CSV file by the columns that its header names, in any order. Comma, semicolon and tab are recognized.
 * What is wrong with the file's shape comes back as issues.
 *
 * @throws AppError too-large, beyond so many lines.
 */
export async function readCsv(
  text: string,
  columns: readonly ImportColumn[],
  linesLimit: number,
): Promise<CsvFile> {
  const delimiter = delimiterOf(text, new Set(columns.map(({ name }) => name)));
  const lines: CsvLine[] = [];
  const issues: ImportIssue[] = [];
  let header: string[] | null = null;
  let isHeaderBad = false;
  let lastLine = 0;
  const take = ({ record, raw, info: { lines: line } }: CsvRecord) => {
    lastLine = line;
    if (!header) {
      header = record.map(headerName);
      issues.push(...headerIssues(header, columns));
      isHeaderBad = issues.length > 0;
      return;
    }
    if (isHeaderBad || record.every((cell) => cell.trim() === "")) return;
    if (lines.length >= linesLimit) throw new AppError("too-large", 413, { linesLimit });
    if (isQuoteBroken(raw, delimiter)) {
      issues.push({ line, field: "", code: "quote-broken", params: {} });
      return;
    }
    if (record.length !== header.length) {
      const params = { expected: header.length, found: record.length };
      issues.push({ line, field: "", code: "field-count", params });
      return;
    }
    const cells = header.map((name, index) => [name, unguarded(record[index]!.trim())] as const);
    lines.push({ line, cells: new Map(cells) });
  };
  const parser = Readable.from(pieces(text)).pipe(
    parse({
      bom: true,
      delimiter,
      info: true,
      raw: true,
      relax_column_count: true,
      relax_quotes: true,
      skip_empty_lines: true,
      // Taken as they are read, and not from the stream: its error would drop what waits in it.
      on_record: (record) => {
        take(record as unknown as CsvRecord);
        return null;
      },
    }),
  );
  try {
    await finished(parser.resume());
  } catch (error) {
    if ((error as { code?: string }).code !== "CSV_QUOTE_NOT_CLOSED") throw error;
    // The mark that nothing closes swallows the rest of the file: it stands after what could be read.
    issues.push({ line: lastLine + 1, field: "", code: "quote-broken", params: {} });
  }
  if (header && lines.length === 0 && issues.length === 0)
    issues.push({ line: 1, field: "", code: "no-lines", params: {} });
  return { delimiter, lines, issues };
}
