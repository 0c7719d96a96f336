import { splitLine } from "../../shared/history-file/cells";
import type { HistoryHead, HistoryMapping, ProposedMapping } from "../../shared/schemas/history";
import { decoderOf, firstBytes, isWorkbook } from "./open-source";
import { delimiterOf, hasValues, recognise } from "./recognise";
import { markLength, sniffEncoding } from "./text-encoding";
import { readSheet, sheetNames } from "./workbook";

const HEAD_BYTES = 64 * 1024;
const LINES_SHOWN = 40;
const CELLS_SHOWN = 60;
const CELL_SHOWN = 80;

const cut = (rows: readonly (readonly string[])[]) =>
  rows.map((row) => row.slice(0, CELLS_SHOWN).map((cell) => cell.slice(0, CELL_SHOWN)));

/** A remembered mapping fits where its columns are there and hold what they should. */
function fits(
  mapping: HistoryMapping,
  proposed: ProposedMapping | null,
  rows: readonly (readonly string[])[],
): boolean {
  const columns = mapping.levels.map(({ column }) => column);
  const width = Math.max(0, ...rows.map(({ length }) => length));
  if (Math.max(...columns) >= width) return false;
  return (
    proposed === null ||
    (proposed.skipLines === mapping.skipLines &&
      mapping.levels.every(({ column, channel }) => {
        const found = proposed.levels.find((level) => level.column === column);
        return found === undefined || found.channel === channel;
      }))
  );
}

function headOf(
  head: Omit<HistoryHead, "proposed" | "proposedFrom">,
  recognised: ProposedMapping | null,
  remembered: HistoryMapping | null,
): HistoryHead {
  if (remembered && fits(remembered, recognised, head.lines))
    return { ...head, proposed: { ...remembered, startsAt: null }, proposedFrom: "instrument" };
  return { ...head, proposed: recognised, proposedFrom: recognised ? "file" : null };
}

/** A workbook often begins with a sheet about itself. */
const SHEETS_TRIED = 5;

async function firstRows(file: string, sheet: string): Promise<string[][]> {
  const rows: string[][] = [];
  await readSheet(
    file,
    sheet,
    () => undefined,
    (cells, line) => {
      while (rows.length < line - 1 && rows.length < LINES_SHOWN) rows.push([]);
      if (rows.length < LINES_SHOWN) rows.push([...cells]);
      return rows.length < LINES_SHOWN;
    },
  );
  return rows;
}

/** A file that holds heads, or nothing: there is no line with values in it. */
export class FileWithoutValues extends Error {}

/**
 * The beginning of a file as cells, and a mapping that fits what is seen in it.
 *
 * @throws FileWithoutValues where the whole of it was seen and none is there.
 */
export async function readHead(
  file: string,
  remembered: HistoryMapping | null,
  sheet: string | null = remembered?.sheet ?? null,
): Promise<HistoryHead> {
  const { bytes } = await firstBytes(file, HEAD_BYTES);
  if (isWorkbook(bytes)) {
    const sheets = await sheetNames(file);
    const named =
      sheet !== null && sheets.includes(sheet) ? [sheet] : sheets.slice(0, SHEETS_TRIED);
    let shown: { lines: string[][]; recognised: ProposedMapping | null } = {
      lines: [],
      recognised: null,
    };
    let hasAny = false;
    for (const name of named) {
      const lines = cut(await firstRows(file, name));
      const recognised = recognise(lines, ",", name, ".");
      if (shown.lines.length === 0 || recognised) shown = { lines, recognised };
      hasAny ||= hasValues(lines) || lines.length >= LINES_SHOWN;
      if (recognised) break;
    }
    if (!hasAny && named.length === sheets.length) throw new FileWithoutValues();
    return headOf(
      { format: "xlsx", encoding: null, sheets, lines: shown.lines },
      shown.recognised,
      remembered,
    );
  }
  const encoding = sniffEncoding(bytes);
  const text = encoding.startsWith("utf-16")
    ? new TextDecoder(encoding).decode(bytes, { stream: true })
    : decoderOf(encoding)(bytes.subarray(markLength(bytes)));
  const all = text.split(/\r\n|\n|\r/);
  // The last one may be cut off by the end of what was read.
  const texts = (all.length > 1 && bytes.length === HEAD_BYTES ? all.slice(0, -1) : all).slice(
    0,
    LINES_SHOWN,
  );
  const filled = texts.filter((line) => line.trim() !== "");
  const delimiter = delimiterOf(filled.slice(Math.min(12, Math.floor(filled.length / 2))));
  const lines = cut(texts.map((line) => splitLine(line, delimiter)));
  if (all.length <= LINES_SHOWN && bytes.length < HEAD_BYTES && !hasValues(lines))
    throw new FileWithoutValues();
  return headOf(
    { format: "text", encoding, sheets: [], lines, delimiter },
    recognise(lines, delimiter, null),
    remembered,
  );
}
