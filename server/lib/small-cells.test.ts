import { describe, expect, test } from "vitest";
import { protectCounts, type RowShape } from "./small-cells";

const PLAIN: RowShape = { parts: [], nested: [] };
/** In noise: measured, by group, never; of them undecided. */
const SHAPE: RowShape = {
  parts: [1, 2, 3],
  nested: [
    [0, 1],
    [0, 4],
  ],
};
const row = (shape: RowShape, ...counts: number[]) =>
  protectCounts(shape, [[counts]]).tables[0]![0];

describe("counts of people", () => {
  test("from five on are shown, and none is shown as none", () => {
    expect(row(PLAIN, 5, 0, 12)).toEqual([5, 0, 12]);
    expect(row(PLAIN, 12, 4, 1)).toEqual([12, "few", "few"]);
  });

  test("of fewer than five people nothing is said, not even that it is none of them", () => {
    expect(row(SHAPE, 4, 4, 0, 0, 0)).toEqual(["few", "few", "few", "few", "few"]);
    expect(row(SHAPE, 0, 0, 0, 0, 0)).toEqual([0, 0, 0, 0, 0]);
  });

  test("a part whose rest is small is withheld", () => {
    expect(row(SHAPE, 20, 20, 0, 0, 18)).toEqual([20, 20, 0, 0, "withheld"]);
    expect(row(SHAPE, 12, 10, 2, 0, 12)).toEqual([12, "withheld", "few", 0, 12]);
  });

  test("one hidden part of a whole takes the smallest other with it", () => {
    expect(row(SHAPE, 23, 10, 3, 10, 0)).toEqual([23, "withheld", "few", 10, 0]);
  });

  test("several hidden parts that leave one way only take another with them", () => {
    expect(row({ parts: [1, 2, 3], nested: [] }, 17, 4, 4, 9)).toEqual([
      17,
      "few",
      "few",
      "withheld",
    ]);
    expect(row({ parts: [1, 2, 3], nested: [] }, 16, 4, 3, 9)).toEqual([16, "few", "few", 9]);
  });

  test("what no part can hide, the whole does", () => {
    expect(row({ parts: [1, 2], nested: [] }, 7, 4, 3)).toEqual([7, "few", "few"]);
    expect(row({ parts: [1, 2], nested: [] }, 8, 4, 4)).toEqual(["withheld", "few", "few"]);
  });
});

describe("a total over the rows", () => {
  const column = (total: number, ...counts: number[]) => {
    const { tables, total: sum } = protectCounts(PLAIN, [counts.map((count) => [count])], [total]);
    return { rows: tables[0]!.flat(), total: sum![0] };
  };

  test("gives no hidden row away", () => {
    expect(column(30, 3, 9, 18)).toEqual({ rows: ["few", "withheld", 18], total: 30 });
    expect(column(29, 3, 2, 24, 0)).toEqual({ rows: ["few", "few", 24, 0], total: 29 });
    expect(column(26, 1, 1, 24)).toEqual({ rows: ["few", "few", "withheld"], total: 26 });
  });

  test("goes where no other row is left to hide", () => {
    expect(column(8, 4, 4)).toEqual({ rows: ["few", "few"], total: "withheld" });
  });

  test("hides in each row again what a withheld cell gives away", () => {
    const { tables, total } = protectCounts(
      { parts: [1, 2], nested: [] },
      [
        [
          [20, 3, 17],
          [30, 15, 15],
        ],
      ],
      [50, 18, 32],
    );
    expect(total).toEqual([50, 18, 32]);
    expect(tables[0]).toEqual([
      [20, "few", "withheld"],
      [30, "withheld", "withheld"],
    ]);
  });
});

/** Every table of small counts, worked out again from what is shown: no hidden count has one value only. */
test("nothing hidden in a table of two rows and two parts can be worked out", () => {
  const range = [0, 1, 3, 4, 5, 9];
  const isWithin = (cell: unknown, value: number) =>
    typeof cell === "number" ? cell === value : cell !== "few" || value < 5;
  for (const a of range)
    for (const b of range)
      for (const c of range)
        for (const d of range) {
          const shown = protectCounts(
            { parts: [1, 2], nested: [] },
            [
              [
                [a + b, a, b],
                [c + d, c, d],
              ],
            ],
            [a + b + c + d, a + c, b + d],
          );
          const cells = [...shown.tables[0]!.flat(), ...shown.total!];
          const few = [a, b, c, d].filter((value) => value > 0 && value < 5).length;
          if (few === 0) continue;
          const ways: number[][] = [];
          for (let w = 0; w <= 18; w++)
            for (let x = 0; x <= 18; x++)
              for (let y = 0; y <= 18; y++)
                for (let z = 0; z <= 18; z++) {
                  const guess = [w + x, w, x, y + z, y, z, w + x + y + z, w + y, x + z];
                  if (guess.every((value, at) => isWithin(cells[at], value)))
                    ways.push([w, x, y, z]);
                  if (ways.length > 200) break;
                }
          for (const [at, value] of [a, b, c, d].entries())
            if (value > 0 && value < 5)
              expect(new Set(ways.map((way) => way[at])).size, `${[a, b, c, d]}`).toBeGreaterThan(
                1,
              );
        }
});
