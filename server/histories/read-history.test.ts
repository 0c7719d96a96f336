import { appendFileSync, mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { MISSING } from "../../shared/acoustics/history";
import { HistoryMapping } from "../../shared/schemas/history";
import { FileWithoutValues, readHead } from "./read-head";
import { readHistory } from "./read-history";

let folder = "";
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "dinward-histories-"));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

let count = 0;
function put(content: string | Buffer): string {
  count += 1;
  const file = join(folder, `${count}.csv`);
  writeFileSync(file, content);
  return file;
}

interface Reading {
  mapping?: Partial<HistoryMapping>;
  timeZone?: string;
  answers?: string[];
}

/** Reads a file by the mapping that is proposed for it, changed as told. */
async function read(
  content: string | Buffer,
  { mapping, timeZone = "Europe/Berlin", answers = [] }: Reading = {},
) {
  const file = put(content);
  const head = await readHead(file, null);
  const merged = HistoryMapping.parse({ ...head.proposed, ...mapping });
  const { report, grid } = await readHistory(
    { file, mapping: merged, timeZone, answers },
    () => undefined,
  );
  const found = report.issues.map(({ severity, code, line }) => `${severity} ${code} ${line}`);
  return { head, report, grid, found, levels: grid?.levels.map((one) => Array.from(one)) ?? [] };
}

const second = (index: number) =>
  new Date(Date.UTC(2026, 2, 2, 6, 0, index)).toISOString().slice(11, 19);
const rows = (length: number, line: (index: number) => string) =>
  Array.from({ length }, (_, index) => line(index)).join("\n");
const plain = (length = 20, from = 0) =>
  rows(length, (index) => `2026-03-02 ${second(from + index)},${84 + (index % 10) / 10}`);

describe("how a file may be written", () => {
  const wanted = [8450, 8460, MISSING, 8480];
  const german = [
    "Datum;Uhrzeit;LAeq [dB]",
    "02.03.2026;06:00:00;84,5",
    "02.03.2026;06:00:01;84,6",
    "02.03.2026;06:00:02;",
    "02.03.2026;06:00:03;84,8",
  ].join("\r\n");
  const english = [
    "Start time,LAeq",
    "2026-03-02T06:00:00,84.5",
    "2026-03-02T06:00:01,84.6",
    "2026-03-02T06:00:02,NaN",
    "2026-03-02T06:00:03,84.8",
  ].join("\n");
  const spaced = ["t / s | LAeq dB", "0 | 84.5", "1 | 84.6", "2 | --", "3 | 84.8"].join("\n");

  test.each([
    [
      "UTF-8, semicolons, decimal commas, day first, carriage returns",
      Buffer.from(`${german}\r\n`),
    ],
    ["with a byte order mark", Buffer.from(`\ufeff${german}\r\n`)],
    ["UTF-16, little end first, with its mark", Buffer.from(`\ufeff${german}`, "utf16le")],
    [
      "UTF-16, big end first, with its mark",
      Buffer.from(`\ufeff${german}\r\n`, "utf16le").swap16(),
    ],
    ["UTF-16 without a mark", Buffer.from(`${german}\r\n`, "utf16le")],
    [
      "Windows-1252",
      Buffer.from(`${german.replace(/(?=\r\n|$)/g, ";Süd").replace("Süd", "Gerät")}\r\n`, "latin1"),
    ],
    ["points and commas, ISO times", Buffer.from(`${english}\n`)],
    [
      "lines that end with a carriage return alone",
      Buffer.from(`${english.replaceAll("\n", "\r")}\r`),
    ],
    ["quoted cells", Buffer.from(`${english.replace(/^(.*),(.*)$/gm, '"$1","$2"')}\n`)],
    ["tabs", Buffer.from(`${english.replaceAll(",", "\t")}\n`)],
  ])("%s", async (_, bytes) => {
    const { levels, report, found } = await read(bytes);
    expect(levels).toEqual([wanted]);
    expect(report).toMatchObject({
      intervalMs: 1000,
      startsAt: "2026-03-02T05:00:00.000Z",
      endsAt: "2026-03-02T05:00:04.000Z",
    });
    expect(found).toEqual(["told value-missing 4"]);
  });

  test("seconds since the start, and a start that the officer says", async () => {
    const { levels, report } = await read(`${spaced}\n`, {
      mapping: { startsAt: "2026-03-02T06:00:00" },
    });
    expect(levels).toEqual([wanted]);
    expect(report.startsAt).toBe("2026-03-02T05:00:00.000Z");
    expect((await read(`${spaced}\n`)).found).toContain("refused start-missing 1");
  });

  test("a time of day that passes midnight", async () => {
    const { report, levels } = await read(
      "Zeit;LAS\n23:59:59;80,1\n00:00:00;80,2\n00:00:01;80,3\n",
      { mapping: { startsAt: "2026-03-02T23:59" } },
    );
    expect(levels).toEqual([[8010, 8020, 8030]]);
    expect(report.startsAt).toBe("2026-03-02T22:59:59.000Z");
  });

  test("twelve-hour clocks, months by name, UTC and a stated zone", async () => {
    const twelve = await read(
      "Time,LAeq\n3/14/2026 12:59:59 PM,80\n3/14/2026 1:00:00 PM,81\n3/14/2026 1:00:01 PM,82\n",
    );
    expect(twelve.head.proposed?.dateOrder).toBe("mdy");
    expect(twelve.report.startsAt).toBe("2026-03-14T11:59:59.000Z");
    const named = await read("Time,LAeq\n02-Mar-2026 06:00:00,80\n02-Mar-2026 06:00:01,81\n");
    expect(named.report.startsAt).toBe("2026-03-02T05:00:00.000Z");
    const utc = await read("Time,LAeq\n2026-03-02 06:00:00,80\n2026-03-02 06:00:01,81\n", {
      mapping: { clock: "utc" },
    });
    expect(utc.report.startsAt).toBe("2026-03-02T06:00:00.000Z");
    const stated = await read(
      "Time,LAeq\n2026-03-02T06:00:00+05:30,80\n2026-03-02T06:00:01+05:30,81\n",
    );
    expect(stated.report.startsAt).toBe("2026-03-02T00:30:00.000Z");
  });

  test("lines before the head, more columns than are wanted, and a foot", async () => {
    const { head, levels, found } = await read(
      `Export\nSerial;4711\n\nNr;Time;LAeq dB;LCpeak dB;Battery\n1;2026-03-02 06:00:00;84.1;100.2;88\n2;2026-03-02 06:00:01;84.2;100.3;88\nEnd of data\n`,
    );
    expect(head.proposed).toMatchObject({
      skipLines: 4,
      levels: [
        { column: 2, channel: "laeq" },
        { column: 3, channel: "lcpeak" },
      ],
    });
    expect(levels).toEqual([
      [8410, 8420],
      [10_020, 10_030],
    ]);
    expect(found).toEqual(["asked foot-lines 7"]);
  });

  test("eighths of seconds, by their fraction and under whole seconds", async () => {
    const fraction = await read(
      `Time,LAeq\n${rows(40, (index) => `2026-03-02 06:00:0${Math.floor(index / 8)}.${String((index % 8) * 125).padStart(3, "0")},80.${index % 10}`)}\n`,
    );
    expect([fraction.report.intervalMs, fraction.report.valuesCount]).toEqual([125, 40]);
    const shared = await read(
      `Time,LAeq\n${rows(44, (index) => `2026-03-02 06:00:0${Math.floor((index + 4) / 8)},80.${index % 10}`)}\n`,
    );
    expect([shared.report.intervalMs, shared.report.valuesCount, shared.found]).toEqual([
      125,
      44,
      ["told lines-share-a-time 2"],
    ]);
    expect(shared.report.startsAt).toBe("2026-03-02T05:00:00.500Z");
  });

  test("one value a minute", async () => {
    const minutes = await read(
      `Time,LAeq\n${rows(30, (index) => `2026-03-02 06:${String(index).padStart(2, "0")},80.5`)}\n`,
    );
    expect(minutes.report).toMatchObject({ intervalMs: 60_000, valuesCount: 30 });
  });

  test("hundredths are kept, further decimals told", async () => {
    const { levels, found } = await read(
      "Time,LAeq\n2026-03-02 06:00:00,84.123\n2026-03-02 06:00:01,84.125\n2026-03-02 06:00:02,-1.5\n",
    );
    expect(levels).toEqual([[8412, 8413, -150]]);
    expect(found).toEqual(["told hundredths-kept 2"]);
  });
});

describe("what is recognised", () => {
  const proposed = async (content: string) => (await readHead(put(content), null)).proposed;

  test("a date and a time in two columns, also where a workbook wrote midnight beside the day", async () => {
    const split = { kind: "date-and-time", dateColumn: 0, timeColumn: 1 };
    const lines = (date: string) =>
      rows(20, (index) => `${date},${second(index)},${84 + (index % 10) / 10}`);
    for (const content of [
      `Date,Time,LAeq\n${lines("2026-03-02")}`,
      `Date,Time,LAeq\n${lines("2026-03-02 00:00:00")}`,
      `Day,Clock reading,LAeq\n${lines("2026-03-02 00:00:00")}`,
    ])
      expect((await proposed(content))?.time).toEqual(split);
    const { grid, found } = await read(`Date,Time,LAeq\n${lines("2026-03-02 00:00:00")}`);
    expect(found).toEqual([]);
    expect(grid?.levels[0]).toHaveLength(20);
  });

  test("the time, where no head says what the levels are", async () => {
    const pascals = `Time,p\n${rows(20, (index) => `2026-03-02 ${second(index)},0.6`)}`;
    expect(await proposed(pascals)).toMatchObject({
      skipLines: 1,
      time: { kind: "date-time", column: 0 },
      levels: [],
    });
  });
});

describe("what is not as it should be", () => {
  test("missing seconds are filled and told, many of them asked about", async () => {
    const few = await read(`Time,LAeq\n${plain(10)}\n${plain(10, 13)}\n`);
    expect([few.found, few.report.valuesCount, few.report.channels[0]?.missing]).toEqual([
      ["told missing-filled 12"],
      23,
      3,
    ]);
    const many = await read(`Time,LAeq\n${plain(10)}\n${plain(10, 110)}\n`);
    expect(many.report.issues).toMatchObject([
      { severity: "asked", code: "clock-jump", line: 12, params: { count: 100, seconds: 100 } },
    ]);
  });

  test("repeated seconds are told where they agree and asked about where they do not", async () => {
    const { found, levels } = await read(
      "Time,LAeq\n2026-03-02 06:00:00,80\n2026-03-02 06:00:01,81\n2026-03-02 06:00:01,81\n2026-03-02 06:00:02,82\n2026-03-02 06:00:02,99\n2026-03-02 06:00:03,83\n2026-03-02 06:00:04,84\n",
    );
    expect(found.toSorted()).toEqual(["asked repeated-different 6", "told repeated-same 4"]);
    expect(levels).toEqual([[8000, 8100, 8200, 8300, 8400]]);
  });

  test("a clock that goes back refuses the file", async () => {
    const { found, grid } = await read(`Time,LAeq\n${plain(20, 600)}\n${plain(20)}\n`);
    expect(found).toEqual(["refused clock-went-back 22"]);
    expect(grid).toBeNull();
  });

  test("marks over and under the range are asked about, whatever they look like", async () => {
    const { report, levels } = await read(
      "Time,LAeq\n2026-03-02 06:00:00,>140\n2026-03-02 06:00:01,80\n2026-03-02 06:00:02,UR\n2026-03-02 06:00:03,satt\n",
      { mapping: { overRange: ["satt"] } },
    );
    expect(report.channels[0]).toMatchObject({ overRange: 2, underRange: 1, missing: 3 });
    expect(levels).toEqual([[MISSING, 8000, MISSING, MISSING]]);
    expect(report.issues.map(({ severity, code }) => `${severity} ${code}`)).toEqual([
      "asked over-range",
      "asked under-range",
    ]);
  });

  test.each([
    ["within its number", "2026-03-02 06:00:20,8"],
    ["within its time", "2026-03-02 06:0"],
    ["after its delimiter", "2026-03-02 06:00:20,"],
  ])("a last line cut off %s is left out and told", async (_, last) => {
    const { found, report } = await read(
      `Time,LAeq\n${plain(20).replace(/,84$/gm, ",84.0")}\n${last}`,
    );
    expect([found, report.valuesCount]).toEqual([["told line-cut-off 22"], 20]);
  });

  test("a whole last line without its end is kept", async () => {
    const { found, report } = await read(
      `Time,LAeq\n${plain(20).replace(/,84$/gm, ",84.0")}\n2026-03-02 06:00:20,84.5`,
    );
    expect([found, report.valuesCount]).toEqual([[], 21]);
  });

  test("levels in tenths and in pascals are recognised from their range, and asked about", async () => {
    const tenths = await read(
      "Time,LAeq\n2026-03-02 06:00:00,843\n2026-03-02 06:00:01,851\n2026-03-02 06:00:02,902\n",
    );
    expect(tenths.head.proposed?.levels[0]?.unit).toBe("dB/10");
    expect([tenths.levels, tenths.found]).toEqual([[[8430, 8510, 9020]], ["asked unit-tenths 2"]]);
    const wrong = await read("Time,LAeq\n2026-03-02 06:00:00,843\n2026-03-02 06:00:01,851\n", {
      mapping: { levels: [{ column: 1, channel: "laeq", unit: "dB" }] },
    });
    expect(wrong.found).toEqual(["refused levels-in-tenths 2"]);
    // 0.2 Pa is 80 dB and 2 Pa 100 dB re 20 µPa.
    const pascals = await read(
      "Time,LAeq\n2026-03-02 06:00:00,0.2\n2026-03-02 06:00:01,2\n2026-03-02 06:00:02,2E-1\n",
    );
    expect(pascals.head.proposed?.levels[0]?.unit).toBe("Pa");
    expect([pascals.levels, pascals.found]).toEqual([
      [[8000, 10_000, 8000]],
      ["asked unit-pascals 2"],
    ]);
    const taken = await read("Time,LAeq\n2026-03-02 06:00:00,0.2\n2026-03-02 06:00:01,2\n", {
      mapping: { levels: [{ column: 1, channel: "laeq", unit: "dB" }] },
    });
    expect(taken.found).toEqual(["asked levels-in-pascals 2"]);
  });

  test("lines that can't be read refuse the file by their number and column", async () => {
    const { report } = await read(
      "Time,LAeq\n2026-03-02 06:00:00,80\n2026-03-02 06:00:01,eighty\n2026-03-02 06:00:02\nrubbish,1\n2026-03-02 06:00:04,80\n2026-03-02 06:00:05,80\n",
    );
    const refused = report.issues.filter(({ severity }) => severity === "refused");
    expect(
      refused.map(({ severity, code, line, column }) => [severity, code, line, column]),
    ).toEqual([
      ["refused", "not-a-level", 3, "LAeq"],
      ["refused", "cells-missing", 4, null],
      ["refused", "not-a-time", 5, null],
    ]);
  });

  test("a date that can be read in two ways is asked about", async () => {
    const { found } = await read("Time,LAeq\n02/03/2026 06:00:00,80\n02/03/2026 06:00:01,81\n");
    expect(found).toEqual(["asked date-ambiguous 2"]);
    expect(
      (await read("Time,LAeq\n02.03.2026 06:00:00,80\n02.03.2026 06:00:01,81\n")).found,
    ).toEqual([]);
  });

  test("an interval that is none, too long or too short", async () => {
    const odd = await read(
      `Time,LAeq\n${rows(12, (index) => `2026-03-02 06:00:${String(Math.floor(index * index * 0.4)).padStart(2, "0")},80.${index % 10}`)}\n`,
    );
    expect(odd.found.some((one) => one.startsWith("refused"))).toBe(true);
    const slow = await read(
      `Time,LAeq\n${rows(12, (index) => `2026-03-02 06:${String(index * 5).padStart(2, "0")}:00,80.${index % 10}`)}\n`,
    );
    expect(slow.found).toEqual(["refused interval-unsupported 2"]);
    expect(
      (
        await read("Time,LAeq\n2026-03-02 06:00:00,80\n", {
          mapping: {
            skipLines: 1,
            time: { kind: "date-time", column: 0 },
            levels: [{ column: 1, channel: "laeq", unit: "dB" }],
          } as never,
        })
      ).found,
    ).toEqual(["refused no-interval 2"]);
  });

  test("a column without a level, a mapping that reads nothing, and an empty file", async () => {
    const empty = await read(
      "Time,LAeq,LCpeak\n2026-03-02 06:00:00,80,-\n2026-03-02 06:00:01,81,-\n",
      {
        mapping: {
          levels: [
            { column: 1, channel: "laeq", unit: "dB" },
            { column: 2, channel: "lcpeak", unit: "dB" },
          ],
        },
      },
    );
    expect(empty.found).toContain("refused column-empty 2");
    await expect(readHead(put(""), null)).rejects.toThrow(FileWithoutValues);
    await expect(readHead(put("Time,LAeq\n"), null)).rejects.toThrow(FileWithoutValues);
  });
});

describe("when the site's clock is changed", () => {
  // Berlin: forward at 02:00 on 2026-03-29, back at 03:00 on 2026-10-25.
  const at = (date: string, times: string[]) =>
    `Time,LAeq\n${times.map((time, index) => `${date} ${time},80.${index % 10}`).join("\n")}\n`;
  const minutes = (from: string, length: number) => {
    const [hour = 0, minute = 0] = from.split(":").map(Number);
    return Array.from({ length }, (_, index) => {
      const of = hour * 60 + minute + index;
      return `${String(Math.floor(of / 60)).padStart(2, "0")}:${String(of % 60).padStart(2, "0")}:00`;
    });
  };

  test("forward: nothing is missing where the file's clock took part", async () => {
    const { found, report } = await read(
      at("2026-03-29", [...minutes("01:50", 10), ...minutes("03:00", 10)]),
    );
    expect(found).toEqual(["told clock-set-forward 12"]);
    expect(report).toMatchObject({
      valuesCount: 20,
      startsAt: "2026-03-29T00:50:00.000Z",
      endsAt: "2026-03-29T01:10:00.000Z",
    });
  });

  test("forward: times in the gap show that the instrument kept the old time", async () => {
    const { found, report } = await read(at("2026-03-29", minutes("01:50", 80)));
    expect(found).toEqual(["told clock-not-set 2"]);
    expect(report).toMatchObject({ valuesCount: 80, endsAt: "2026-03-29T02:10:00.000Z" });
  });

  test("back: the hour that comes twice is read twice", async () => {
    const { found, report } = await read(
      at("2026-10-25", [...minutes("01:50", 70), ...minutes("02:00", 70)]),
    );
    expect(found).toEqual(["told clock-set-back 72"]);
    expect(report).toMatchObject({
      valuesCount: 140,
      startsAt: "2026-10-24T23:50:00.000Z",
      endsAt: "2026-10-25T02:10:00.000Z",
    });
  });

  test("back: a file that begins in that hour is asked about, and taken as answered", async () => {
    const content = at("2026-10-25", minutes("02:10", 20));
    expect((await read(content)).found).toEqual(["asked time-twice 2"]);
    expect((await read(content, { answers: ["time-twice"] })).report.startsAt).toBe(
      "2026-10-25T00:10:00.000Z",
    );
    expect((await read(content, { answers: ["time-twice-second"] })).report.startsAt).toBe(
      "2026-10-25T01:10:00.000Z",
    );
  });

  test("a zone without such changes has none", async () => {
    expect(
      (await read(at("2026-03-29", minutes("01:50", 80)), { timeZone: "Asia/Kolkata" })).found,
    ).toEqual([]);
  });
});

describe("large files", () => {
  /** One value a second for as many lines; after two days of them the same lines again and again. */
  function putLarge(length: number): string {
    const file = put("Time,LAeq,LAS\n");
    const block = (from: number, lines: number) =>
      `${rows(lines, (index) => `${new Date(Date.UTC(2026, 0, 1) + (from + index) * 1000).toISOString().slice(0, 19)},84.${index % 10},85.${index % 10}`)}\n`;
    appendFileSync(file, block(0, Math.min(length, 200_000)));
    const later = Buffer.from(block(200_000, 100_000));
    for (let at = 200_000; at < length; at += 100_000) appendFileSync(file, later);
    return file;
  }
  const mapping = HistoryMapping.parse({
    skipLines: 1,
    decimal: ".",
    time: { kind: "date-time", column: 0 },
    levels: [
      { column: 1, channel: "laeq" },
      { column: 2, channel: "las" },
    ],
  });

  test("ten million lines are refused within bounded memory", async () => {
    const file = putLarge(10_000_000);
    const before = process.memoryUsage().rss;
    let most = before;
    const watch = setInterval(() => {
      most = Math.max(most, process.memoryUsage().rss);
    }, 20);
    const { report, grid } = await readHistory(
      { file, mapping, timeZone: "UTC", answers: [] },
      () => undefined,
    );
    clearInterval(watch);
    expect(grid).toBeNull();
    expect(report.issues[0]).toMatchObject({ severity: "refused" });
    expect(most - before).toBeLessThan(200 * 1024 * 1024);
  }, 120_000);

  test("26 hours are longer than a history may be", async () => {
    const file = putLarge(26 * 3600);
    const { report } = await readHistory(
      { file, mapping, timeZone: "UTC", answers: [] },
      () => undefined,
    );
    expect(report.issues).toMatchObject([
      { code: "longer-than-a-day", severity: "refused", line: 86_402 },
    ]);
  });
});

describe("marks at the range", () => {
  const marked = (mark: (index: number) => string) =>
    `time,LAeq\n${rows(20, (index) => `2026-03-02 ${second(index)},${mark(index)}`)}\n`;

  test.each(["OL", "OVL", "OVR", "over", ">140"])("%s is known as over the range", async (mark) => {
    const { report, found } = await read(marked((index) => (index === 4 ? mark : "84.1")));
    expect(report.channels[0]?.overRange).toBe(1);
    expect(found).toEqual(["asked over-range 6"]);
  });

  test("a sign after numbers is told once, with its count, until somebody says what it means", async () => {
    const content = marked((index) => (index % 2 === 0 ? "104.2*" : "84.1"));
    const { report, found, grid } = await read(content);
    expect(found).toEqual(["refused levels-with-a-sign 2"]);
    expect(report.issues[0]).toMatchObject({
      column: "LAeq",
      params: { text: "104.2*", sign: "*", count: 10 },
    });
    expect(grid).toBeNull();
    const said = await read(content, { mapping: { overRange: ["*"] } });
    expect(said.report.channels[0]?.overRange).toBe(10);
    expect(said.found).toEqual(["asked over-range 2"]);
  });
});
