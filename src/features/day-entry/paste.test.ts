import { expect, test } from "vitest";
import type { UnaccountedWords } from "./cells";
import { gridColumns, taskCell } from "./columns";
import { openDay, reduceDraft } from "./draft";
import { copyRange, fillDown, isBlock, parseBlock, pasteBlock, writeBlock } from "./paste";
import { TASK, testDay, workerId } from "./test-day";

const words: UnaccountedWords = {
  quiet: "quiet",
  likeTheRest: "like the rest",
  unknown: "unknown",
};
const view = testDay(3);
const columns = gridColumns(view.tasks, []);
const at = (row: number, column: number) => ({
  fromRow: row,
  toRow: row,
  fromColumn: column,
  toColumn: column,
});
const runUp = columns.findIndex(({ id }) => id === taskCell(TASK.runUp));

test.each([
  [
    "1\t2\n3\t4\n",
    [
      ["1", "2"],
      ["3", "4"],
    ],
  ],
  ["1\r\n2\r\n", [["1"], ["2"]]],
  [
    '"a\tb"\t"say ""x"""\n"two\nlines"\t',
    [
      ["a\tb", 'say "x"'],
      ["two\nlines", ""],
    ],
  ],
  ["", []],
  ["7", [["7"]]],
])("%j is read as a spreadsheet writes it", (text, block) => {
  expect(parseBlock(text)).toEqual(block);
});

test("what is written reads back", () => {
  const block = [
    ["a\tb", 'say "x"'],
    ["two\nlines", ""],
  ];
  expect(parseBlock(writeBlock(block))).toEqual(block);
});

test("a single value with its line end is no block", () => {
  expect(isBlock("450\n")).toBe(false);
  expect(isBlock("450\t30")).toBe(true);
});

test("a block goes to the cells under it", () => {
  const { changes, leftOut } = pasteBlock(
    [
      ["10", "20"],
      ["30", ""],
    ],
    at(1, runUp),
    openDay(view).rows,
    columns,
    "en",
    words,
  );
  expect(changes.map(({ workerId: who, cell, value }) => [who, cell, value.value])).toEqual([
    [workerId(2), taskCell(TASK.runUp), 10],
    [workerId(2), taskCell(TASK.teardown), 20],
    [workerId(3), taskCell(TASK.runUp), 30],
    [workerId(3), taskCell(TASK.teardown), null],
  ]);
  expect(leftOut).toEqual({ rows: 0, columns: 0, absent: 0 });
});

test("what does not fit is counted, and the worker who is absent is left alone", () => {
  const rows = reduceDraft(openDay(view), {
    type: "set-absent",
    workerId: workerId(2),
    isAbsent: true,
  }).rows;
  const worn = columns.findIndex(({ id }) => id === "worn");
  const block = Array.from({ length: 5 }, () => ["90", "1", "2"]);
  const { changes, leftOut } = pasteBlock(block, at(0, worn), rows, columns, "en", words);
  expect(changes.map((change) => change.workerId)).toEqual([workerId(1), workerId(3)]);
  expect(leftOut).toEqual({ rows: 2, columns: 2, absent: 1 });
});

test("a single value fills the selection", () => {
  const selection = { fromRow: 0, toRow: 2, fromColumn: runUp, toColumn: runUp };
  const { changes } = pasteBlock([["45"]], selection, openDay(view).rows, columns, "en", words);
  expect(changes.map(({ value }) => value.value)).toEqual([45, 45, 45]);
});

test("a copied row goes back into the grid as it was", () => {
  const { rows } = openDay(view);
  const range = { fromRow: 0, toRow: 0, fromColumn: 0, toColumn: columns.length - 2 };
  const text = copyRange(range, rows, columns, () => "worked out", "de", words);
  const { changes, leftOut } = pasteBlock(parseBlock(text), at(0, 0), rows, columns, "de", words);
  for (const { cell, value } of changes) {
    expect(value.value).toEqual(rows[0]?.cells[cell]?.value ?? null);
  }
  expect(leftOut.columns).toBe(0);
});

test("filling down takes the top of the selection, or the row above, and never a reading", () => {
  const { rows } = reduceDraft(openDay(view), {
    type: "set-cells",
    changes: pasteBlock([["33"]], at(0, runUp), openDay(view).rows, columns, "en", words).changes,
  });
  const selection = { fromRow: 0, toRow: 2, fromColumn: runUp, toColumn: runUp };
  expect(fillDown(selection, rows, columns).map(({ value }) => value.value)).toEqual([33, 33]);
  expect(fillDown(at(1, runUp), rows, columns)[0]?.value.value).toBe(33);
  expect(fillDown(at(0, runUp), rows, columns)).toEqual([]);
  const reading = columns.findIndex(({ id }) => id === "reading");
  expect(fillDown(at(1, reading), rows, columns)).toEqual([]);
});
