import { expect, test } from "vitest";
import { placeLabels } from "./mark-rows";

test("one label stands beside its line, on the side that has room", () => {
  expect(placeLabels([{ lineX: 40, width: 100 }], 300)).toEqual([
    { x: 46, isEnd: false, row: 0, isUnderLine: false },
  ]);
  expect(placeLabels([{ lineX: 260, width: 100 }], 300)).toEqual([
    { x: 254, isEnd: true, row: 0, isUnderLine: false },
  ]);
});

test("labels that would print on each other stand in rows, and no line runs through words", () => {
  const labels = [
    { lineX: 4, width: 250 },
    { lineX: 10, width: 240 },
    { lineX: 180, width: 120 },
  ];
  const placed = placeLabels(labels, 284);
  expect(new Set(placed.map(({ row }) => row)).size).toBe(3);
  const spans = placed.map(({ x, isEnd, row }, index) => ({
    row,
    lineX: labels[index]!.lineX,
    from: isEnd ? x - labels[index]!.width : x,
    to: isEnd ? x : x + labels[index]!.width,
  }));
  for (const one of spans)
    for (const other of spans)
      if (other.row > one.row) expect(other.lineX < one.from || other.lineX > one.to).toBe(true);
});

test("a long label stays within the picture", () => {
  expect(placeLabels([{ lineX: 120, width: 260 }], 284)[0]).toMatchObject({ x: 24, isEnd: false });
});

test("words with no room beside their own line stand under it: the line ends above them", () => {
  // A German mark of 34 letters on a phone of 320 px.
  const [label] = placeLabels([{ lineX: 246, width: 252 }], 288);
  expect(label).toMatchObject({ x: 252, isEnd: true, isUnderLine: true });
  expect(placeLabels([{ lineX: 246, width: 227 }], 288)[0]?.isUnderLine).toBe(false);
});
