import { type FileHandle, open } from "node:fs/promises";
import { Readable } from "node:stream";
import { createInflateRaw } from "node:zlib";

/**
 * Worksheets as rows of text, read as a stream. Only what the directory at the end of the file names is opened, its
 * bytes are counted as they are inflated, and formulas are never computed: their stored values are taken.
 */

/** Why a workbook is not read. */
export class WorkbookRefused extends Error {
  constructor(
    readonly code:
      | "workbook-broken"
      | "workbook-too-large"
      | "workbook-has-macros"
      | "workbook-encrypted"
      | "sheet-missing",
    readonly params: Readonly<Record<string, string | number>> = {},
  ) {
    super(code);
  }
}

/** Bytes of all parts together, inflated: a day of eighths of seconds with seven columns takes some 250 MB. */
const INFLATED_LIMIT = 600 * 1024 * 1024;
/** Nothing that a person made packs better than this. */
const RATIO_LIMIT = 400;
const STRINGS_LIMIT = 64 * 1024 * 1024;
const ENTRIES_LIMIT = 5_000;
const PIECE_BYTES = 1 << 16;

interface Entry {
  name: string;
  method: number;
  packedSize: number;
  size: number;
  offset: number;
}

async function readAt(handle: FileHandle, position: number, length: number): Promise<Buffer> {
  const bytes = Buffer.alloc(length);
  const { bytesRead } = await handle.read(bytes, 0, length, position);
  if (bytesRead < length) throw new WorkbookRefused("workbook-broken");
  return bytes;
}

const END = 0x06054b50;
const ENTRY = 0x02014b50;
const LOCAL = 0x04034b50;

/** The directory at the end, checked before a byte is inflated. */
async function readDirectory(handle: FileHandle): Promise<Map<string, Entry>> {
  const { size } = await handle.stat();
  const tailLength = Math.min(size, 65_557);
  const tail = await readAt(handle, size - tailLength, tailLength);
  let end = tail.length - 22;
  while (end >= 0 && tail.readUInt32LE(end) !== END) end -= 1;
  if (end < 0) throw new WorkbookRefused("workbook-broken");
  const count = tail.readUInt16LE(end + 10);
  const directorySize = tail.readUInt32LE(end + 12);
  const directoryOffset = tail.readUInt32LE(end + 16);
  if (
    count > ENTRIES_LIMIT ||
    directorySize > 8 * 1024 * 1024 ||
    directoryOffset + directorySize > size
  )
    throw new WorkbookRefused("workbook-broken");
  const directory = await readAt(handle, directoryOffset, directorySize);
  const entries = new Map<string, Entry>();
  let at = 0;
  let total = 0;
  for (let index = 0; index < count; index++) {
    if (at + 46 > directory.length || directory.readUInt32LE(at) !== ENTRY)
      throw new WorkbookRefused("workbook-broken");
    const flags = directory.readUInt16LE(at + 8);
    const [nameLength, extraLength, commentLength] = [
      directory.readUInt16LE(at + 28),
      directory.readUInt16LE(at + 30),
      directory.readUInt16LE(at + 32),
    ];
    const entry = {
      name: directory.toString("utf8", at + 46, at + 46 + nameLength).replace(/^\//, ""),
      method: directory.readUInt16LE(at + 10),
      packedSize: directory.readUInt32LE(at + 20),
      size: directory.readUInt32LE(at + 24),
      offset: directory.readUInt32LE(at + 42),
    };
    if ((flags & 1) !== 0) throw new WorkbookRefused("workbook-encrypted");
    if (/vbaproject\.bin$|macrosheets\//i.test(entry.name))
      throw new WorkbookRefused("workbook-has-macros");
    total += entry.size;
    if (total > INFLATED_LIMIT || entry.size > Math.max(1_000_000, entry.packedSize * RATIO_LIMIT))
      throw new WorkbookRefused("workbook-too-large", { limitMb: INFLATED_LIMIT / 1024 / 1024 });
    entries.set(entry.name, entry);
    at += 46 + nameLength + extraLength + commentLength;
  }
  return entries;
}

async function* pieces(handle: FileHandle, from: number, to: number): AsyncGenerator<Buffer> {
  for (let at = from; at < to; at += PIECE_BYTES)
    yield await readAt(handle, at, Math.min(PIECE_BYTES, to - at));
}

/** A part's text, piece by piece; what inflates to more than the directory declared is refused. */
async function* partText(
  handle: FileHandle,
  entry: Entry,
  onProgress: (progressPct: number) => void = () => undefined,
): AsyncGenerator<string> {
  const local = await readAt(handle, entry.offset, 30);
  if (local.readUInt32LE(0) !== LOCAL || (entry.method !== 0 && entry.method !== 8))
    throw new WorkbookRefused("workbook-broken");
  const begin = entry.offset + 30 + local.readUInt16LE(26) + local.readUInt16LE(28);
  // Not the handle's own stream: that one closes the handle when it ends.
  const raw = Readable.from(pieces(handle, begin, begin + entry.packedSize));
  const decoder = new TextDecoder("utf-8");
  let size = 0;
  try {
    if (entry.packedSize === 0) return;
    const inflated = entry.method === 8 ? raw.pipe(createInflateRaw()) : raw;
    raw.on("error", (error) => inflated.destroy(error));
    for await (const bytes of inflated as AsyncIterable<Buffer>) {
      size += bytes.length;
      if (size > entry.size)
        throw new WorkbookRefused("workbook-too-large", { limitMb: INFLATED_LIMIT / 1024 / 1024 });
      onProgress((100 * size) / entry.size);
      yield decoder.decode(bytes, { stream: true });
    }
  } catch (error) {
    throw error instanceof WorkbookRefused ? error : new WorkbookRefused("workbook-broken");
  } finally {
    raw.destroy();
  }
}

const ENTITIES: Record<string, string> = { amp: "&", lt: "<", gt: ">", quot: '"', apos: "'" };
const unescapeXml = (text: string) =>
  text.includes("&")
    ? text.replace(/&(#x[0-9a-f]+|#\d+|\w+);/gi, (whole, name: string) => {
        if (name[0] !== "#") return ENTITIES[name] ?? whole;
        const code = /^#x/i.test(name) ? Number.parseInt(name.slice(2), 16) : Number(name.slice(1));
        return code > 0 && code <= 0x10ffff ? String.fromCodePoint(code) : "";
      })
    : text;

interface Markup {
  open(name: string, attributes: string, isEmpty: boolean): void;
  close(name: string): void;
  text(text: string): void;
}

const TAG_LIMIT = 1 << 20;

/** Takes markup apart as it comes. No document types, so no entities of a file's own. */
async function readMarkup(
  pieces: AsyncIterable<string>,
  to: Markup,
  goesOn: () => boolean,
): Promise<void> {
  let rest = "";
  for await (const piece of pieces) {
    rest = rest === "" ? piece : rest + piece;
    let at = 0;
    for (;;) {
      const begin = rest.indexOf("<", at);
      if (begin < 0) break;
      const end = rest.indexOf(">", begin);
      if (end < 0) break;
      if (begin > at) to.text(unescapeXml(rest.slice(at, begin)));
      const isEmpty = rest.charCodeAt(end - 1) === 47;
      const tag = rest.slice(begin + 1, isEmpty ? end - 1 : end);
      if (tag.startsWith("!")) {
        if (/^!doctype|^!entity/i.test(tag)) throw new WorkbookRefused("workbook-broken");
      } else if (!tag.startsWith("?")) {
        const isClosing = tag.startsWith("/");
        const space = tag.search(/\s/);
        const name = (isClosing ? tag.slice(1) : space < 0 ? tag : tag.slice(0, space))
          .trim()
          .replace(/^.*:/, "");
        if (isClosing) to.close(name);
        else {
          to.open(name, space < 0 ? "" : tag.slice(space), isEmpty);
          if (isEmpty) to.close(name);
        }
      }
      at = end + 1;
      if (!goesOn()) return;
    }
    rest = rest.slice(at);
    if (rest.length > TAG_LIMIT) throw new WorkbookRefused("workbook-broken");
  }
}

const attribute = (attributes: string, name: string): string | null => {
  const found = new RegExp(`(?:^|[\\s:])${name}\\s*=\\s*(?:"([^"]*)"|'([^']*)')`).exec(attributes);
  return found ? unescapeXml(found[1] ?? found[2] ?? "") : null;
};
const always = () => true;

interface Opened {
  handle: FileHandle;
  entries: Map<string, Entry>;
  sheets: { name: string; part: string }[];
  is1904: boolean;
}

async function openWorkbook(file: string): Promise<Opened> {
  const handle = await open(file, "r");
  try {
    const entries = await readDirectory(handle);
    const book = entries.get("xl/workbook.xml");
    const relations = entries.get("xl/_rels/workbook.xml.rels");
    if (!book || !relations) throw new WorkbookRefused("workbook-broken");
    const targets = new Map<string, string>();
    await readMarkup(
      partText(handle, relations),
      {
        open(name, attributes) {
          const [id, target] = [attribute(attributes, "Id"), attribute(attributes, "Target")];
          if (name === "Relationship" && id && target)
            targets.set(id, target.startsWith("/") ? target.slice(1) : `xl/${target}`);
        },
        close: () => undefined,
        text: () => undefined,
      },
      always,
    );
    const sheets: Opened["sheets"] = [];
    let is1904 = false;
    await readMarkup(
      partText(handle, book),
      {
        open(name, attributes) {
          if (name === "workbookPr")
            is1904 = /^(1|true)$/.test(attribute(attributes, "date1904") ?? "");
          const part =
            name === "sheet" ? targets.get(attribute(attributes, "id") ?? "") : undefined;
          if (part && entries.has(part))
            sheets.push({ name: attribute(attributes, "name") ?? "", part });
        },
        close: () => undefined,
        text: () => undefined,
      },
      always,
    );
    if (sheets.length === 0) throw new WorkbookRefused("workbook-broken");
    return { handle, entries, sheets, is1904 };
  } catch (error) {
    await handle.close();
    throw error;
  }
}

/** Texts that cells share. */
async function readStrings({ handle, entries }: Opened): Promise<string[]> {
  const entry = entries.get("xl/sharedStrings.xml");
  if (!entry) return [];
  if (entry.size > STRINGS_LIMIT)
    throw new WorkbookRefused("workbook-too-large", { limitMb: STRINGS_LIMIT / 1024 / 1024 });
  const strings: string[] = [];
  let text = "";
  let isText = false;
  await readMarkup(
    partText(handle, entry),
    {
      open(name) {
        if (name === "si") text = "";
        isText = name === "t";
      },
      close(name) {
        if (name === "si") strings.push(text);
        isText = false;
      },
      text(found) {
        if (isText) text += found;
      },
    },
    always,
  );
  return strings;
}

type Shown = "date" | "number";

/** Which styles show a number as a date or a time. */
async function readStyles({ handle, entries }: Opened): Promise<Shown[]> {
  const entry = entries.get("xl/styles.xml");
  if (!entry || entry.size > STRINGS_LIMIT) return [];
  const styles: Shown[] = [];
  const ownFormats = new Map<number, Shown>();
  let isInCells = false;
  await readMarkup(
    partText(handle, entry),
    {
      open(name, attributes) {
        if (name === "numFmt") {
          const code = (attribute(attributes, "formatCode") ?? "").replace(
            /"[^"]*"|\[[^\]]*\]|\\./g,
            "",
          );
          ownFormats.set(
            Number(attribute(attributes, "numFmtId")),
            /[ymdhs]/i.test(code) ? "date" : "number",
          );
        }
        if (name === "cellXfs") isInCells = true;
        if (name === "xf" && isInCells) {
          const id = Number(attribute(attributes, "numFmtId") ?? 0);
          const isDate = (id >= 14 && id <= 22) || (id >= 45 && id <= 47);
          styles.push(ownFormats.get(id) ?? (isDate ? "date" : "number"));
        }
      },
      close(name) {
        if (name === "cellXfs") isInCells = false;
      },
      text: () => undefined,
    },
    always,
  );
  return styles;
}

const DAY_MS = 86_400_000;
const EPOCH_1900 = Date.UTC(1899, 11, 30);
const EPOCH_1904 = Date.UTC(1904, 0, 1);

/** A workbook's number for a date and time as text; one under a day is a time of day alone. */
function dateText(serial: number, is1904: boolean): string {
  const ms = Math.round(serial * DAY_MS);
  const text = new Date((is1904 ? EPOCH_1904 : EPOCH_1900) + ms).toISOString();
  const clock = text.slice(11, 23).replace(/\.000$/, "");
  return serial < 1 && !is1904 ? clock : `${text.slice(0, 10)} ${clock}`;
}

function columnOf(reference: string): number {
  let column = 0;
  for (let at = 0; at < reference.length; at++) {
    const letter = reference.charCodeAt(at);
    if (letter < 65 || letter > 90) break;
    column = column * 26 + letter - 64;
  }
  return column - 1;
}

export async function sheetNames(file: string): Promise<string[]> {
  const { handle, sheets } = await openWorkbook(file);
  await handle.close();
  return sheets.map(({ name }) => name);
}

const COLUMNS_LIMIT = 512;

/**
 * Gives a worksheet's rows to `take` until it says no more; decimal marks in numbers are points. The first sheet where
 * none is named.
 *
 * @throws WorkbookRefused
 */
export async function readSheet(
  file: string,
  sheet: string | null,
  onProgress: (progressPct: number) => void,
  take: (cells: readonly string[], line: number) => boolean,
): Promise<void> {
  const opened = await openWorkbook(file);
  try {
    const found = opened.sheets.find(({ name }) => sheet === null || name === sheet);
    if (!found) throw new WorkbookRefused("sheet-missing", { sheet: sheet ?? "" });
    const [strings, styles] = [await readStrings(opened), await readStyles(opened)];
    let cells: string[] = [];
    let line = 0;
    let column = -1;
    let kind = "";
    let style = 0;
    let value = "";
    let isValue = false;
    let goesOn = true;
    const put = () => {
      if (column < 0 || column >= COLUMNS_LIMIT || value === "") return;
      while (cells.length < column) cells.push("");
      if (kind === "s") cells[column] = strings[Number(value)] ?? "";
      else if (kind === "" || kind === "n")
        cells[column] = styles[style] === "date" ? dateText(Number(value), opened.is1904) : value;
      else cells[column] = value;
    };
    await readMarkup(
      partText(opened.handle, opened.entries.get(found.part)!, onProgress),
      {
        open(name, attributes) {
          switch (name) {
            case "row":
              cells = [];
              column = -1;
              line = Number(attribute(attributes, "r") ?? line + 1);
              break;
            case "c": {
              const reference = attribute(attributes, "r");
              column = reference ? columnOf(reference) : column + 1;
              kind = attribute(attributes, "t") ?? "";
              style = Number(attribute(attributes, "s") ?? 0);
              value = "";
              break;
            }
            case "v":
            case "t":
              isValue = true;
          }
        },
        close(name) {
          if (name === "v" || name === "t") isValue = false;
          else if (name === "c") put();
          else if (name === "row")
            goesOn = take(
              cells.map((cell) => cell?.trim() ?? ""),
              line,
            );
        },
        text(text) {
          if (isValue) value += text;
        },
      },
      () => goesOn,
    );
  } finally {
    await opened.handle.close();
  }
}
