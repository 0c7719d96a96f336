import { expect, test } from "vitest";
import { formatBoundedDose, formatDose } from "./dose";

test.each([
  [83.4, "83\u00a0%"],
  [9.94, "9.9\u00a0%"],
  [9.96, "10\u00a0%"],
  [0.04, "0.0\u00a0%"],
  [1264, "1\u202f264\u00a0%"],
])("a dose of %d reads %s", (dosePct, expected) => {
  expect(formatDose(dosePct, "en")).toBe(expected);
});

test("German writes a comma; no dose is a dash", () => {
  expect(formatDose(4.25, "de")).toBe("4,3\u00a0%");
  expect(formatDose(null, "de")).toBe("\u2013");
});

test("a dose that only bounds the true one bears its mark", () => {
  expect(formatBoundedDose(139.6, "lower", "en")).toBe("≥140\u00a0%");
  expect(formatBoundedDose(139.6, "exact", "en")).toBe("140\u00a0%");
  expect(formatBoundedDose(null, "upper", "en")).toBe("–");
});
