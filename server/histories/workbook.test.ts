import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { crc32, deflateRawSync } from "node:zlib";
import excel from "exceljs";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { HistoryMapping } from "../../shared/schemas/history";
import { readHead } from "./read-head";
import { readHistory } from "./read-history";
import { readSheet, sheetNames, WorkbookRefused } from "./workbook";

let folder = "";
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "dinward-workbooks-"));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

let count = 0;
function newFile(): string {
  count += 1;
  return join(folder, `${count}.xlsx`);
}

interface Part {
  name: string;
  text: string;
  /** What the directory says it inflates to, where it lies. */
  declaredSize?: number;
}

/** A zip of these parts, written by hand so that it can lie. */
function zip(parts: readonly Part[]): string {
  const locals: Buffer[] = [];
  const entries: Buffer[] = [];
  let offset = 0;
  for (const { name, text, declaredSize } of parts) {
    const whole = Buffer.from(text);
    const packed = deflateRawSync(whole);
    const head = Buffer.alloc(30);
    head.writeUInt32LE(0x04034b50, 0);
    head.writeUInt16LE(8, 8);
    head.writeUInt16LE(Buffer.byteLength(name), 26);
    const local = Buffer.concat([head, Buffer.from(name), packed]);
    const entry = Buffer.alloc(46);
    entry.writeUInt32LE(0x02014b50, 0);
    entry.writeUInt16LE(8, 10);
    entry.writeUInt32LE(crc32 ? crc32(whole) : 0, 16);
    entry.writeUInt32LE(packed.length, 20);
    entry.writeUInt32LE(declaredSize ?? whole.length, 24);
    entry.writeUInt16LE(Buffer.byteLength(name), 28);
    entry.writeUInt32LE(offset, 42);
    entries.push(Buffer.concat([entry, Buffer.from(name)]));
    locals.push(local);
    offset += local.length;
  }
  const directory = Buffer.concat(entries);
  const end = Buffer.alloc(22);
  end.writeUInt32LE(0x06054b50, 0);
  end.writeUInt16LE(parts.length, 8);
  end.writeUInt16LE(parts.length, 10);
  end.writeUInt32LE(directory.length, 12);
  end.writeUInt32LE(offset, 16);
  const file = newFile();
  writeFileSync(file, Buffer.concat([...locals, directory, end]));
  return file;
}

const book = (sheetXml: string, more: Part[] = []): Part[] => [
  {
    name: "xl/workbook.xml",
    text: `<?xml version="1.0"?><workbook xmlns:r="r"><sheets><sheet name="A &amp; B" sheetId="1" r:id="rId1"/></sheets></workbook>`,
  },
  {
    name: "xl/_rels/workbook.xml.rels",
    text: `<Relationships><Relationship Id="rId1" Target="worksheets/sheet1.xml"/></Relationships>`,
  },
  { name: "xl/worksheets/sheet1.xml", text: sheetXml },
  ...more,
];

async function rowsOf(file: string): Promise<string[][]> {
  const rows: string[][] = [];
  await readSheet(
    file,
    null,
    () => undefined,
    (cells) => {
      rows.push([...cells]);
      return true;
    },
  );
  return rows;
}
const refusal = (file: string) =>
  rowsOf(file).then(
    () => null,
    (error: unknown) => (error instanceof WorkbookRefused ? error.code : String(error)),
  );

describe("a workbook as a program writes it", () => {
  async function write(): Promise<string> {
    const workbook = new excel.Workbook();
    workbook.addWorksheet("About").addRow(["Levels of a shift"]);
    const sheet = workbook.addWorksheet("Levels");
    sheet.addRow(["Device", "4711"]);
    sheet.addRow(["Date and time", "LAeq (dB)", "LCpeak (dB)", "Sum"]);
    for (let second = 0; second < 50; second++) {
      const row = sheet.addRow([
        new Date(Date.UTC(2026, 2, 2, 6, 0, second)),
        84 + (second % 10) / 10,
        second === 7 ? ">140" : 101.25,
        { formula: "B3+C3", result: 185 },
      ]);
      row.getCell(1).numFmt = "dd/mm/yyyy hh:mm:ss";
    }
    const file = newFile();
    await workbook.xlsx.writeFile(file);
    return file;
  }

  test("is read from the sheet that holds levels, dates as dates and formulas by their stored value", async () => {
    const file = await write();
    expect(await sheetNames(file)).toEqual(["About", "Levels"]);
    const head = await readHead(file, null);
    expect(head.lines[2]).toEqual(["2026-03-02 06:00:00", "84", "101.25", "185"]);
    expect(head.proposed).toMatchObject({
      sheet: "Levels",
      skipLines: 2,
      time: { kind: "date-time", column: 0 },
    });
    const { report, grid } = await readHistory(
      {
        file,
        mapping: HistoryMapping.parse(head.proposed),
        timeZone: "Europe/Berlin",
        answers: [],
      },
      () => undefined,
    );
    expect(report).toMatchObject({
      valuesCount: 50,
      intervalMs: 1000,
      startsAt: "2026-03-02T05:00:00.000Z",
    });
    expect(report.issues).toMatchObject([{ code: "over-range", line: 10, column: "LCpeak (dB)" }]);
    expect(Array.from(grid!.levels[0]!.subarray(0, 3))).toEqual([8400, 8410, 8420]);
  });
});

describe("a workbook by hand", () => {
  test("shared and inline texts, gaps, entities and namespaces", async () => {
    const strings = {
      name: "xl/sharedStrings.xml",
      text: "<sst><si><t>LA</t><r><t>eq</t></r></si><si><t>&#176; &lt;x&gt;</t></si></sst>",
    };
    const file = zip(
      book(
        `<x:worksheet xmlns:x="x"><x:sheetData><x:row r="2"><x:c r="A2" t="s"><x:v>0</x:v></x:c><x:c r="C2" t="s"><x:v>1</x:v></x:c></x:row><x:row><x:c t="inlineStr"><x:is><x:t>in</x:t></x:is></x:c><x:c><x:v>1.5</x:v></x:c></x:row></x:sheetData></x:worksheet>`,
        [strings],
      ),
    );
    expect(await rowsOf(file)).toEqual([
      ["LAeq", "", "° <x>"],
      ["in", "1.5"],
    ]);
  });

  test("a bomb is refused by what its directory declares", async () => {
    const bomb = { name: "xl/worksheets/sheet1.xml", text: " ".repeat(30_000_000) };
    expect(await refusal(zip([...book("").slice(0, 2), bomb]))).toBe("workbook-too-large");
    const many = Array.from({ length: 40 }, (_, index) => ({
      name: `xl/media/${index}`,
      text: "x",
      declaredSize: 900_000,
    }));
    const huge = {
      name: "xl/media/huge",
      text: "y".repeat(5_000_000),
      declaredSize: 700 * 1024 * 1024,
    };
    expect(await refusal(zip([...book("<worksheet/>"), ...many, huge]))).toBe("workbook-too-large");
  });

  test("and one that lies about its size, by counting", async () => {
    const row = `<row><c><v>1</v></c></row>`;
    const lie = {
      name: "xl/worksheets/sheet1.xml",
      text: `<worksheet><sheetData>${row.repeat(200_000)}`,
      declaredSize: 5_000,
    };
    expect(await refusal(zip([...book("").slice(0, 2), lie]))).toBe("workbook-too-large");
  });

  test.each([
    ["macros", [{ name: "xl/vbaProject.bin", text: "x" }], "workbook-has-macros"],
    ["older macros", [{ name: "xl/macrosheets/sheet1.xml", text: "x" }], "workbook-has-macros"],
  ])("%s are refused", async (_, more, code) => {
    expect(await refusal(zip(book("<worksheet/>", more)))).toBe(code);
  });

  test("entities of its own, no workbook, and half a file are refused", async () => {
    expect(await refusal(zip(book(`<!DOCTYPE x [<!ENTITY a "aaaa">]><worksheet/>`)))).toBe(
      "workbook-broken",
    );
    expect(await refusal(zip([{ name: "a.txt", text: "x" }]))).toBe("workbook-broken");
    const file = newFile();
    writeFileSync(file, "PK\x03\x04 and no more");
    expect(await refusal(file)).toBe("workbook-broken");
  });
});
