import { describe, expect, test } from "vitest";
import { nameRows } from "./name-rows";

describe("names under their brackets", () => {
  const texts = ["Fettling of castings", "Chipping", "Loading", "Grinding with the angle grinder"];
  const room = { letter: 4.6, gap: 6, width: 680 };

  test("never stand over one another, and never past the edge", () => {
    const names = [10, 14, 300, 660].map((from, index) => ({ from, text: texts[index] ?? "" }));
    const places = nameRows(names, room);
    expect(places[0]?.row).toBe(0);
    expect(places[1]?.row).toBe(1);
    expect(places[2]?.row).toBe(0);
    for (const [index, { x }] of places.entries()) {
      expect(x).toBeGreaterThanOrEqual(0);
      expect(x + (texts[index] ?? "").length * 4.6).toBeLessThanOrEqual(680);
    }
  });

  test("keep to one row where there is room, and take more where the picture is narrow", () => {
    const at = (width: number) =>
      texts.map((text, index) => ({ from: (index * width) / texts.length, text }));
    const rowsIn = (width: number) =>
      new Set(nameRows(at(width), { ...room, width }).map(({ row }) => row)).size;
    expect(rowsIn(900)).toBe(1);
    expect(rowsIn(240)).toBeGreaterThan(1);
  });
});
