import { expect, test } from "vitest";
import { formatFigures, scientificParts } from "./figures";

test.each([
  [7.07e9, "7.070", 9],
  [2.5294e5, "2.529", 5],
  [9.99961e3, "1.000", 4],
  [0.00031, "3.100", -4],
  [0, "0.000", 0],
])("%d as a mantissa and a power of ten", (value, mantissa, exponent) => {
  expect(scientificParts(value, "en")).toEqual({ mantissa, exponent });
});

test.each([
  [1.65, "1.65"],
  [1.39123, "1.391"],
  [85, "85"],
  [16.61, "16.61"],
  [0.12345, "0.1235"],
  [0, "0"],
])("%d to four figures", (value, text) => {
  expect(formatFigures(value, "en")).toBe(text);
});

test("decimals as the language writes them", () => {
  expect(formatFigures(16.61, "de")).toBe("16,61");
  expect(scientificParts(7.07e9, "de")?.mantissa).toBe("7,070");
});
