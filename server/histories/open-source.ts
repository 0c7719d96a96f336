import { open } from "node:fs/promises";
import type { HistoryMapping } from "../../shared/schemas/history";
import type { IssueList } from "./issue-list";
import type { RowReader } from "./read-rows";
import { markLength, type TextEncoding } from "./text-encoding";
import { readSheet } from "./workbook";

const LF = 10;
const CR = 13;
const CHUNK_BYTES = 1 << 20;
/** A line this long is no line of a table. */
const LINE_LIMIT = 1 << 20;

export const isWorkbook = (head: Uint8Array): boolean =>
  head[0] === 0x50 && head[1] === 0x4b && head[2] === 3 && head[3] === 4;

/** The first bytes of a file. */
export async function firstBytes(
  file: string,
  count: number,
): Promise<{ bytes: Buffer; size: number }> {
  const handle = await open(file, "r");
  try {
    const bytes = Buffer.alloc(count);
    const { bytesRead } = await handle.read(bytes, 0, count, 0);
    return { bytes: bytes.subarray(0, bytesRead), size: (await handle.stat()).size };
  } finally {
    await handle.close();
  }
}

/** Bytes of whole lines, one piece after the other, the last one closed with a line feed if it was not. */
async function* wholeLines(
  file: string,
  encoding: TextEncoding,
  onProgress: (progressPct: number) => void,
): AsyncGenerator<{ bytes: Buffer; length: number; isCutOff: boolean }> {
  const handle = await open(file, "r");
  try {
    const { size } = await handle.stat();
    const decoder = encoding.startsWith("utf-16") ? new TextDecoder(encoding) : null;
    const read = Buffer.alloc(CHUNK_BYTES);
    let kept: Buffer = Buffer.alloc(0);
    let position = 0;
    let hasLineFeed = false;
    for (;;) {
      const { bytesRead } = await handle.read(read, 0, CHUNK_BYTES, position);
      if (bytesRead === 0) break;
      const skipped = position === 0 && !decoder ? markLength(read) : 0;
      position += bytesRead;
      const fresh = read.subarray(skipped, bytesRead);
      const decoded = decoder
        ? Buffer.from(decoder.decode(fresh, { stream: true }), "utf8")
        : fresh;
      const bytes = Buffer.concat([kept, decoded], kept.length + decoded.length);
      if (!hasLineFeed) {
        hasLineFeed = bytes.includes(LF);
        // Lines that end with a carriage return alone.
        if (!hasLineFeed && bytes.includes(CR)) replaceReturns(bytes);
      }
      const last = bytes.lastIndexOf(LF) + 1;
      if (last > 0) yield { bytes, length: last, isCutOff: false };
      kept = Buffer.from(bytes.subarray(last));
      if (kept.length > LINE_LIMIT) break;
      onProgress((100 * position) / size);
    }
    if (kept.length > 0) {
      const bytes = Buffer.concat([kept, Buffer.from("\n")]);
      yield { bytes, length: bytes.length, isCutOff: true };
    }
  } finally {
    await handle.close();
  }
}

function replaceReturns(bytes: Buffer): void {
  for (let at = bytes.indexOf(CR); at >= 0; at = bytes.indexOf(CR, at + 1)) bytes[at] = LF;
}

export const decoderOf = (encoding: TextEncoding) => {
  const decoder = new TextDecoder(encoding === "windows-1252" ? "windows-1252" : "utf-8");
  return (bytes: Uint8Array) => decoder.decode(bytes);
};

/**
 * Feeds a delimited text to a reader, past no more memory than a piece of it. Says how many lines were read.
 */
export async function readText(
  file: string,
  encoding: TextEncoding,
  mapping: HistoryMapping,
  reader: RowReader,
  issues: IssueList,
  onProgress: (progressPct: number) => void,
): Promise<number> {
  const decode = decoderOf(encoding);
  let line = 1;
  let skipped = 0;
  for await (const { bytes, length, isCutOff } of wholeLines(file, encoding, onProgress)) {
    let from = 0;
    while (skipped < mapping.skipLines && from < length) {
      from = bytes.indexOf(LF, from) + 1;
      skipped += 1;
      line += 1;
    }
    if (isCutOff && from < length) {
      const text = decode(bytes.subarray(from, length - 1));
      const isWhole = reader.takeLast(text, line);
      if (!isWhole) issues.add("told", "line-cut-off", line, { text: text.slice(0, 80) });
      line += 1;
    } else line += reader.takeBytes(bytes, from, length, line);
    if (reader.isFull) break;
  }
  return line - 1;
}

/** Feeds a worksheet to a reader, row by row. */
export async function readWorkbook(
  file: string,
  mapping: HistoryMapping,
  reader: RowReader,
  onProgress: (progressPct: number) => void,
): Promise<number> {
  let last = 0;
  await readSheet(file, mapping.sheet, onProgress, (cells, line) => {
    last = line;
    if (line > mapping.skipLines) reader.takeCells(cells, line);
    return !reader.isFull;
  });
  return last;
}
