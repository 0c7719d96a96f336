import { expect, test } from "vitest";
import { rowTops, visibleSegments } from "./grid-window";

test("draws what is in sight and the row with the focus, and leaves the height to gaps", () => {
  const tops = rowTops(Array.from({ length: 500 }, () => 48));
  const segments = visibleSegments(tops, 4800, 480, 3);
  const rows = segments.flatMap((one) => (one.kind === "row" ? [one.index] : []));
  expect(rows[0]).toBe(3);
  expect(rows).toContain(100);
  expect(rows).toContain(110);
  expect(rows.length).toBeLessThan(40);
  const gapPx = segments.reduce((sum, one) => sum + (one.kind === "gap" ? one.heightPx : 0), 0);
  expect(gapPx + rows.length * 48).toBe(500 * 48);
});

test("an empty crew has nothing to draw", () => {
  expect(visibleSegments(rowTops([]), 0, 480, 0)).toEqual([]);
});
