import { describe, expect, test } from "vitest";
import { Unreadable } from "../../components/form";
import { linesOfSubjects, readSubjects } from "./read-subjects";

const eight = [12, 14, 19, 25, 28, 31, 34, 33];
const seven = eight.slice(1);
const tabs = (values: readonly unknown[]) => values.join("\t");

describe("subjects out of a spreadsheet", () => {
  test("eight bands a line, with a head of frequencies or without", () => {
    const head = tabs(["63 Hz", "125 Hz", "250 Hz", "500 Hz", "1k", "2k", "4k", "8k"]);
    expect(readSubjects(`${tabs(eight)}\n${tabs(eight)}`, "en")).toEqual([eight, eight]);
    expect(readSubjects(`Subject\t${head}\nA\t${tabs(eight)}\n\n`, "en")).toEqual([eight]);
  });

  test("each is known by its line, heads and empty lines counted", () => {
    const head = "63 125 250 500 1000 2000 4000 8000";
    expect(linesOfSubjects(`${head}\n\n${eight.join(" ")}\r\n${eight.join(" ")}\n`, "en")).toEqual([
      3, 4,
    ]);
    expect(linesOfSubjects("", "en")).toEqual([]);
  });

  test("seven begin at 125 Hz", () => {
    expect(readSubjects(tabs(seven), "en")).toEqual([[null, ...seven]]);
  });

  test("a column of numbers that count is the subjects', whether or not there is 63 Hz", () => {
    const numbered = (values: readonly number[]) =>
      [1, 2, 3].map((number) => tabs([number, ...values])).join("\n");
    expect(readSubjects(numbered(eight), "en")).toEqual([eight, eight, eight]);
    expect(readSubjects(numbered(seven), "en")).toEqual([1, 2, 3].map(() => [null, ...seven]));
  });

  test("by the reader's own decimal mark", () => {
    const line = "12,5;14;19;25;28;31;34;33";
    expect(readSubjects(line, "de")[0]?.[0]).toBe(12.5);
  });

  test("what is missing stays empty, what is too much is not dropped", () => {
    expect(readSubjects(tabs(eight.slice(0, 5)), "en")).toEqual([
      [...eight.slice(0, 5), null, null, null],
    ]);
    const [line] = readSubjects(tabs([...eight, 30, 29]), "en");
    expect(line?.[7]).toBeInstanceOf(Unreadable);
    expect(line?.[7]).toMatchObject({ code: "too-many-bands", text: "30 29" });
  });

  test("seven values among lines of eight can't be read, and the other way round", () => {
    const read = (...rows: readonly (readonly number[])[]) =>
      readSubjects(rows.map(tabs).join("\n"), "en");
    for (const found of [read(eight, seven, eight), read(seven, eight, seven)]) {
      expect(found[1]?.[0]).toMatchObject({ code: "other-63-hz" });
      expect([found[0]?.[0], found[2]?.[0]].some((one) => one instanceof Unreadable)).toBe(false);
    }
    expect(read(seven, seven)).toEqual([
      [null, ...seven],
      [null, ...seven],
    ]);
    expect(read(eight, eight)).toEqual([eight, eight]);
  });

  test("an empty cell keeps its place, at the ends too", () => {
    const line = [12, "", 19, 25, 28, 31, 34, ""];
    expect(readSubjects(`${tabs(line)}\r\n${tabs(["", ...seven])}\r\n`, "en")).toEqual([
      [12, null, 19, 25, 28, 31, 34, null],
      [null, ...seven],
    ]);
  });

  test("nothing is nobody", () => {
    expect(readSubjects(" \n ", "en")).toEqual([]);
  });
});
