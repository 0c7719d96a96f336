import { describe, expect, test } from "vitest";
import { Unreadable } from "./form";
import { readBands } from "./read-bands";

const eight = [71, 74, 78, 82, 85, 86, 83, 79];

describe("a row, a column or a table of levels", () => {
  test.each([
    ["a row from a spreadsheet", eight.join("\t")],
    ["a column", eight.join("\r\n")],
    ["with semicolons", eight.join(";")],
    ["with blanks", eight.join("  ")],
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
    expect(readBands(text, "en")).toEqual({ from: 0, values: eight });
  });

  test("decimal commas are the German reader's", () => {
    const text = eight.map((level) => `${level},5`).join("\t");
    expect(readBands(text, "de")?.values).toEqual(eight.map((level) => level + 0.5));
    expect(readBands(text, "en")?.values[0]).toBeInstanceOf(Unreadable);
  });

  test("seven begin at 125 Hz, fewer where they were pasted, and one is the cell's own", () => {
    expect(readBands(eight.slice(1).join(" "), "en", 4)).toEqual({
      from: 1,
      values: eight.slice(1),
    });
    expect(readBands("80 81 82", "en", 6)).toEqual({ from: 6, values: [80, 81] });
    expect(readBands("80", "en", 2)).toBeNull();
  });

  test("three equal third-octaves are 10 lg 3 = 4.77 dB more in their octave", () => {
    const hz = [
      50, 63, 80, 100, 125, 160, 200, 250, 315, 400, 500, 630, 800, 1000, 1250, 1600, 2000, 2500,
      3150, 4000, 5000, 6300, 8000, 10000,
    ];
    const { values } = readBands(hz.map((one) => `${one}\t70`).join("\n"), "en")!;
    expect(values).toHaveLength(8);
    for (const level of values) expect(level).toBeCloseTo(74.7712, 3);
  });
});
