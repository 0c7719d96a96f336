import { expect, test } from "vitest";
import { editNumber, fieldNumber, formatNumber, parseNumber, roundTo } from "./number";

test.each([
  [86.65, 1, 86.7],
  [1.005, 2, 1.01],
  [-0.25, 1, -0.3],
  [98.49447101817775, 1, 98.5],
])("%d to %d decimals is %d, half away from zero", (value, digits, expected) => {
  expect(roundTo(value, digits)).toBe(expected);
});

test("a number wears a true minus, the locale's mark and thin thousands", () => {
  expect(formatNumber(-3.21, 1, "en")).toBe("\u22123.2");
  expect(formatNumber(-3.21, 1, "de")).toBe("\u22123,2");
  expect(formatNumber(13517, 0, "en")).toBe("13\u202f517");
  expect(formatNumber(-0.04, 1, "en")).toBe("0.0");
});

test("no number is a dash, never 0", () => {
  expect(formatNumber(null, 1, "en")).toBe("\u2013");
  expect(formatNumber(Number.NaN, 1, "en")).toBe("\u2013");
});

test.each([
  ["86.7", "en", { kind: "ok", value: 86.7 }],
  ["86,7", "de", { kind: "ok", value: 86.7 }],
  ["86.7", "de", { kind: "ok", value: 86.7 }],
  ["\u22123.2", "en", { kind: "ok", value: -3.2 }],
  ["86,7", "en", { kind: "ambiguous" }],
  ["1.234", "de", { kind: "ambiguous" }],
  ["1.234,5", "de", { kind: "ambiguous" }],
  ["1e400", "en", { kind: "invalid" }],
  ["NaN", "en", { kind: "invalid" }],
  [".", "en", { kind: "invalid" }],
  ["", "en", { kind: "empty" }],
] as const)("%s typed in %s", (text, locale, expected) => {
  expect(parseNumber(text, locale)).toEqual(expected);
});

test("what stands in a field can be typed again", () => {
  for (const locale of ["en", "de"] as const) {
    expect(parseNumber(editNumber(-3.25, locale), locale)).toEqual({ kind: "ok", value: -3.25 });
  }
});

test("a field shows what was typed in full, and what was computed to 0.01", () => {
  expect(fieldNumber(101.4984351485718, "en")).toBe("101.5");
  expect(fieldNumber(-0.7493490621868659, "de")).toBe("−0,75");
  expect(fieldNumber(0.0000123, "en")).toBe("0.0000123");
  expect(fieldNumber(86.725, "en")).toBe("86.725");
  expect(fieldNumber(null, "en")).toBe("");
});
