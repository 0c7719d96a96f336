import { expect, test } from "vitest";
import { equationDigits, followsAsPrinted, holdsAsPrinted, printedResult } from "./equation";
import { formatNumber } from "./number";

// By hand, from the printed numbers alone.
test.each([
  ["80.3 + 1.5", 81.8],
  ["101.5 − 0.7 − 28", 72.8],
  ["14 − (21 − 14)/4 · (2.0 − 2)", 14],
  ["98.0 − (max ((29 − 7), (24 − 7)) + 5)", 71],
  ["10 lg (2.000 × 10³)", 33.0103],
  ["90 + 16.61 lg (200/100)", 95.00011],
  ["√ (4)", 2],
  ["10 lg (0.5 · 10^(80 /10) + 0.5 · 10^(80 /10))", 80],
])("%s is what its reader computes: %d", (text, value) => {
  expect(printedResult(text)).toBeCloseTo(value, 4);
});

test.each(["L A − 28", "10 lg Σ T m / T 0", ""])("nothing is computed from %s", (text) => {
  expect(printedResult(text)).toBeNull();
});

test.each([
  ["L = L A + U = 80.3 + 1.5 = 81.7", false],
  ["L = L A + U = 80.27 + 1.46 = 81.73", true],
  ["PNR = 14 − (21 − 14)/4 · (2.0 − 2) = 14.1", false],
  ["PNR = 14 − (21 − 14)/4 · (1.95 − 2) = 14.09", true],
  ["L ≤ 10 lg Σ = 80", null],
])("%s", (text, follows) => {
  expect(followsAsPrinted(text)).toBe(follows);
});

test("an equation gets as few decimals as make it follow", () => {
  const sumOf = (a: number, b: number) => (digits: number) =>
    `${formatNumber(a, digits, "en")} + ${formatNumber(b, digits, "en")} = ${formatNumber(a + b, digits, "en")}`;
  expect(equationDigits(sumOf(80.5, 1.5))).toBe(1);
  expect(equationDigits(sumOf(80.26, 1.46))).toBe(2);
  expect(equationDigits(sumOf(80.2544, 1.4544))).toBe(4);
  expect(equationDigits(sumOf(80.5, 1.5), 4)).toBe(4);
});

test.each([
  ["≥91.9000 > 90", true],
  ["87.0000 > 87", false],
  ["99.7239 ≥ 85, 99.7239 − 1.4123 = 98.3116 ≥ 85", true],
  ["99.7239 ≥ 85, 99.7239 − 1.4123 = 98.3117 ≥ 85", false],
])("a test holds by its printed numbers: %s", (text, holds) => {
  expect(holdsAsPrinted(text)).toBe(holds);
});
