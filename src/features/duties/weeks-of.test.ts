import { expect, test } from "vitest";
import { monthAfter, weeksOf } from "./weeks-of";

test("a month's weeks run from Monday, filled up by its neighbours", () => {
  // 1 December 2026 is a Tuesday, 1 February 2027 a Monday of four whole weeks.
  const december = weeksOf("2026-12");
  expect(december).toHaveLength(5);
  expect(december[0]?.[0]).toBe("2026-11-30");
  expect(december.at(-1)?.at(-1)).toBe("2027-01-03");
  expect(weeksOf("2027-02")).toHaveLength(4);
  expect(weeksOf("2027-05")).toHaveLength(6);
});

test("months go over the year's end both ways", () => {
  expect(monthAfter("2026-12", 1)).toBe("2027-01");
  expect(monthAfter("2027-01", -1)).toBe("2026-12");
});
