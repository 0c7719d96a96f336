import { describe, expect, test } from "vitest";
import { US_LABEL_HZ } from "../../shared/acoustics/types";
import type { Locale } from "../../shared/i18n/index";
import { Unreadable } from "./form";
import { readBands, type ThirdOctaves } from "./read-bands";

const eight = [71, 74, 78, 82, 85, 86, 83, 79];

interface How {
  locale?: Locale;
  at?: number;
  thirds?: ThirdOctaves;
  bandsHz?: readonly number[];
}
const pasted = (text: string, { locale = "en", thirds = "sum", ...how }: How = {}) =>
  readBands(text, locale, { thirds, ...how });
const read = (text: string, how?: How) => pasted(text, how)?.read;
const values = (text: string, how?: How) => read(text, how)?.values;
const refusal = (text: string, how?: How) => pasted(text, how)?.refusal;

describe("a row, a column or a table of levels", () => {
  test.each([
    ["a row from a spreadsheet", eight.join("\t")],
    ["a column", eight.join("\r\n")],
    ["with semicolons", eight.join(";")],
    ["with blanks", eight.join("  ")],
    ["with commas", eight.join(",")],
    ["a column as a spreadsheet ends it", `${eight.join("\r\n")}\r\n`],
    [
      "two columns, with frequencies",
      "63\t71\n125\t74\n250\t78\n500\t82\n1000\t85\n2000\t86\n4000\t83\n8000\t79",
    ],
    [
      "two columns under a head, with units",
      "Band;Level\n63 Hz;71\n125 Hz;74\n250 Hz;78\n500 Hz;82\n1 kHz;85\n2 kHz;86\n4 kHz;83\n8 kHz;79",
    ],
    [
      "two rows, with frequencies, and more bands than are wanted",
      "Hz\t31.5\t63\t125\t250\t500\t1k\t2k\t4k\t8k\t16k\nLZeq\t60\t71\t74\t78\t82\t85\t86\t83\t79\t70",
    ],
    [
      "two rows of which only one is named",
      "63\t125\t250\t500\t1000\t2000\t4000\t8000\nLZeq\t71\t74\t78\t82\t85\t86\t83\t79",
    ],
  ])("%s", (_, text) => {
    expect(read(text)).toMatchObject({ from: 0, values: eight });
  });

  test("decimal commas are the German reader's", () => {
    const text = eight.map((level) => `${level},5`).join("\t");
    expect(values(text, { locale: "de" })).toEqual(eight.map((level) => level + 0.5));
    expect(values(text)?.[0]).toBeInstanceOf(Unreadable);
    expect(refusal(eight.join(","), { locale: "de" })).toEqual({ code: "commas" });
    expect(values(eight.join(", "), { locale: "de" })).toEqual(eight);
    expect(pasted("71,5", { locale: "de" })).toBeNull();
  });

  test("seven begin at 125 Hz, fewer where they were pasted, and one is the cell's own", () => {
    expect(read(eight.slice(1).join(" "), { at: 4 })).toMatchObject({
      from: 1,
      values: eight.slice(1),
    });
    expect(read("80 81", { at: 6 })).toMatchObject({ from: 6, values: [80, 81] });
    expect(pasted("80", { at: 2 })).toBeNull();
    expect(pasted("80\t", { at: 2 })).toBeNull();
    expect(pasted("\t\t")).toBeNull();
  });
});

describe("an empty cell keeps its place", () => {
  const without = (...bands: number[]) =>
    eight.map((level, band) => (bands.includes(band) ? null : level));
  const join = (bands: number[], by: string) =>
    without(...bands)
      .map((level) => level ?? "")
      .join(by);

  describe.each([
    ["tabs", "\t"],
    ["semicolons", ";"],
    ["commas", ","],
    ["lines of a spreadsheet", "\r\n"],
    ["lines", "\n"],
  ])("by %s", (_, by) => {
    test.each([[[0]], [[7]], [[0, 7]], [[3]], [[3, 4]], [[0, 3, 7]]])("%j", (bands) => {
      // A column's last cell is empty where its line is ended; without that the end is the seventh's own.
      const text = by.endsWith("\n") ? join(bands, by) + by : join(bands, by);
      expect(read(text)).toMatchObject({ from: 0, values: without(...bands) });
    });
  });

  test("fewer than a row, too", () => {
    expect(read("80\t\t82", { at: 2 })).toMatchObject({ from: 2, values: [80, null, 82] });
    expect(read("\n80\n82", { at: 2 })).toMatchObject({ from: 2, values: [null, 80, 82] });
  });

  test("under a head, and beside the frequencies", () => {
    const head = "63\t125\t250\t500\t1000\t2000\t4000\t8000";
    for (const bands of [[0], [7], [0, 7], [3]]) {
      expect(values(`${head}\n${join(bands, "\t")}`)).toEqual(without(...bands));
      const rows = head.split("\t").map((hz, band) => `${hz}\t${without(...bands)[band] ?? ""}\t4`);
      expect(values(rows.join("\n"))).toEqual(without(...bands));
    }
  });

  test("a head that leaves bands out is a head all the same", () => {
    expect(values("250\t500\t1000\n78\t82\t85")).toEqual([
      null,
      null,
      78,
      82,
      85,
      null,
      null,
      null,
    ]);
    expect(values("125 Hz\t80\n250 Hz\t100")).toEqual([
      null,
      80,
      100,
      null,
      null,
      null,
      null,
      null,
    ]);
  });

  test("what can't be told apart is refused", () => {
    // Eight lines of which the last is empty, or seven that are ended.
    expect(refusal(`${eight.slice(1).join("\n")}\n`)).toEqual({ code: "open-end" });
    expect(read(`${eight.slice(1).join("\r\n")}\r\n`)).toMatchObject({ from: 1 });
    expect(refusal("71\t4\n74\t5\n78\t4")).toEqual({ code: "block" });
    expect(refusal(eight.join("\n\n"))).toEqual({ code: "too-many", count: 15, places: 8 });
    expect(refusal("80 81 82", { at: 6 })).toEqual({ code: "too-many", count: 3, places: 2 });
    expect(refusal("63 125 250 500\n71 74 78")).toEqual({ code: "uneven", count: 3, places: 4 });
    expect(refusal("63\t125\t250\t500\t1000\t2000\t4000\t8000")).toEqual({ code: "no-values" });
    expect(refusal("125\t250\t125\t250\n20\t22\t3\t4")).toEqual({ code: "repeated" });
    expect(refusal("16 kHz\t20 kHz\n30\t31")).toEqual({ code: "no-band" });
  });
});

describe("third-octaves", () => {
  const hz = [
    50, 63, 80, 100, 125, 160, 200, 250, 315, 400, 500, 630, 800, 1000, 1250, 1600, 2000, 2500,
    3150, 4000, 5000, 6300, 8000, 10000,
  ];
  const column = (found: readonly number[]) =>
    found.map((one, at) => `${one}\t${20 + at}`).join("\n");

  test("three equal levels are 10 lg 3 = 4.77 dB more in their octave", () => {
    const found = read(hz.map((one) => `${one}\t70`).join("\n"));
    expect(found?.values).toHaveLength(8);
    for (const level of found?.values ?? []) expect(level).toBeCloseTo(74.7712, 3);
    expect(found).toMatchObject({
      summedHz: [63, 125, 250, 500, 1000, 2000, 4000, 8000],
      leftOutHz: [],
    });
  });

  test("levels of an octave that is not whole are left out, and said; none whole is refused", () => {
    const found = read(column(hz.slice(2)));
    expect(found?.values[0]).toBeNull();
    expect(found?.leftOutHz).toEqual([80]);
    expect(refusal("3150\t70\n4000\t71")).toEqual({ code: "no-whole-octave" });
  });

  test("attenuations are those at the octaves’ own frequencies, never a sum", () => {
    const found = read(column(hz), { thirds: "centre" });
    expect(found).toMatchObject({
      values: [21, 24, 27, 30, 33, 36, 39, 42],
      leftOutHz: hz.filter((_, at) => at % 3 !== 1),
      summedHz: [],
    });
  });

  test("what is taken off at a source has no octave of its own: refused", () => {
    expect(refusal(column(hz), { thirds: "refuse" })).toEqual({ code: "not-summed" });
    expect(values("125\t3\n250\t4", { thirds: "refuse" })?.slice(0, 3)).toEqual([null, 3, 4]);
  });

  test("a US report in octave cells: its octaves, and which frequencies were left out", () => {
    const text = `${US_LABEL_HZ.join("\t")}\n20\t21\t22\t23\t24\t25\t26\t27\t28`;
    expect(read(text, { thirds: "centre" })).toMatchObject({
      from: 0,
      values: [null, 20, 21, 22, 23, 24, 26, 28],
      leftOutHz: [3150, 6300],
    });
    expect(read(text, { thirds: "refuse" })).toBeNull();
  });

  test("in US cells a head is no row of attenuations, and 3150 and 6300 Hz have cells", () => {
    const us: How = { bandsHz: US_LABEL_HZ, thirds: "centre" };
    const row = [20, 21, 22, 23, 24, 25, 26, 27, 28];
    expect(read(`Hz\t${US_LABEL_HZ.join("\t")}\nMean\t${row.join("\t")}`, us)).toMatchObject({
      values: row,
      leftOutHz: [],
    });
    expect(values(US_LABEL_HZ.map((one, at) => `${one} Hz;${row[at]}`).join("\n"), us)).toEqual(
      row,
    );
    expect(read("63\t125\t250\n10\t20\t21", us)).toMatchObject({
      values: [20, 21, null, null, null, null, null, null, null],
      leftOutHz: [63],
    });
    expect(values(`\t${row.slice(1).join("\t")}`, us)).toEqual([null, ...row.slice(1)]);
    expect(refusal(US_LABEL_HZ.join(" "), us)).toEqual({ code: "no-values" });
  });

  test("nine values without their frequencies are not eight", () => {
    expect(refusal("20 21 22 23 24 25 26 27 28", { thirds: "centre" })).toEqual({
      code: "too-many",
      count: 9,
      places: 8,
    });
  });
});
