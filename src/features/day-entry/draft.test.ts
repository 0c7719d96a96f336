import { describe, expect, test } from "vitest";
import { cellOf } from "./cells";
import { taskCell, wornCell } from "./columns";
import {
  isBehind,
  isSettled,
  isSpoken,
  openDay,
  type RowDraft,
  rebaseDraft,
  reduceDraft,
} from "./draft";
import { createDraftStore, restoreDraft } from "./draft-store";
import { createRowEvaluator } from "./evaluate-rows";
import { isOnlyFilledIn, rowState } from "./row-state";
import { countRows } from "./save";
import { gridRow, savedShift, TASK, testDay, workerId } from "./test-day";

const type = (number: number, minutes: number) => ({
  type: "set-cells" as const,
  changes: [
    { workerId: workerId(number), cell: taskCell(TASK.runUp), value: cellOf(minutes, "typed") },
  ],
});

function memoryStorage(): Storage {
  const kept = new Map<string, string>();
  return {
    get length() {
      return kept.size;
    },
    clear: () => kept.clear(),
    key: (at) => [...kept.keys()][at] ?? null,
    getItem: (key) => kept.get(key) ?? null,
    setItem: (key, value) => void kept.set(key, value),
    removeItem: (key) => void kept.delete(key),
  };
}

describe("a row that nobody has entered", () => {
  const view = testDay(1);
  const [row] = openDay(view).rows;

  test("opens filled in from crew, nominal day and last wearing time", () => {
    expect(row?.cells).toMatchObject({
      start: { value: "06:00", mark: "filled" },
      length: { value: 480, mark: "filled" },
      [taskCell(TASK.runUp)]: { value: 120, mark: "filled" },
      worn: { value: 100, mark: "filled" },
    });
  });

  test("waits until somebody types in it or confirms it", () => {
    expect(row && isSpoken(row, view.rows[0]!)).toBe(false);
    const typed = reduceDraft(openDay(view), type(1, 90)).rows[0]!;
    expect(isSpoken(typed, view.rows[0]!)).toBe(true);
    const confirmed = reduceDraft(openDay(view), {
      type: "confirm-rows",
      workerIds: [workerId(1)],
      answered: {},
    }).rows[0]!;
    expect(isSpoken(confirmed, view.rows[0]!)).toBe(true);
  });
});

test("whose day stands with another shift is not filled in with a second one, and nothing waits for them", () => {
  const elsewhere = gridRow(1, {
    otherShifts: [
      { shiftId: savedShift(9).shiftId, crewName: null, localStart: "06:00", lengthMin: 480 },
    ],
  });
  const view = testDay([elsewhere, gridRow(2)]);
  const draft = openDay(view);
  const evaluateRow = createRowEvaluator(view);
  const state = (row: RowDraft) => rowState(evaluateRow(row), elsewhere, false);
  const [row] = draft.rows;
  expect(row?.cells).toEqual({});
  expect(state(row!)).toBe("elsewhere");
  expect(countRows(draft, view)).toEqual({ settled: 1, waiting: 1 });
  expect(isOnlyFilledIn(evaluateRow(row!), row!, elsewhere)).toBe(false);
  // A second shift here is somebody's word, and then it waits like any other.
  const copied = reduceDraft(draft, { type: "copy-last", rows: [elsewhere] }).rows[0]!;
  expect(state(copied)).toBe("not-confirmed");
  expect(state(reduceDraft(draft, type(1, 90)).rows[0]!)).toBe("has-fault");
});

test("an unknown wearing time stays unknown beside a known one", () => {
  const nominal = [
    { taskId: TASK.runUp, durationMin: 120 },
    { taskId: TASK.teardown, durationMin: 100 },
  ];
  const [row] = openDay(testDay([gridRow(1, { nominal, lastWorn: { [TASK.runUp]: 98 } })])).rows;
  expect(row?.cells.worn).toBeUndefined();
  expect(row?.cells[wornCell(TASK.runUp)]?.value).toBe(98);
  expect(row?.cells[wornCell(TASK.teardown)]).toBeUndefined();
});

test("only the rows that change are new objects", () => {
  const draft = openDay(testDay(3));
  const next = reduceDraft(draft, type(2, 45));
  expect(next.rows[0]).toBe(draft.rows[0]);
  expect(next.rows[1]).not.toBe(draft.rows[1]);
  expect(next.rows[2]).toBe(draft.rows[2]);
});

test("the last shift is copied to be looked at, and never with its reading", () => {
  const view = testDay(1);
  const reading = cellOf({ kind: "level", levelDb: 97 }, "typed");
  const typed = reduceDraft(openDay(view), {
    type: "set-cells",
    changes: [{ workerId: workerId(1), cell: "reading", value: reading }],
  });
  const [row] = reduceDraft(typed, { type: "copy-last", rows: view.rows }).rows;
  expect(row?.cells.start).toMatchObject({ value: "07:00", mark: "filled" });
  expect(row?.cells[taskCell(TASK.rigging)]).toBeUndefined();
  expect(row?.cells.reading).toEqual(reading);
  expect(row && isSpoken({ ...row, isRunTouched: false }, view.rows[0]!)).toBe(false);
});

test("one share for the shift stands in place of the tasks' own", () => {
  const view = testDay([gridRow(1)]);
  const set = (cell: "worn" | ReturnType<typeof wornCell>, share: number) => ({
    type: "set-cells" as const,
    changes: [{ workerId: workerId(1), cell, value: cellOf(share, "typed") }],
  });
  const own = reduceDraft(openDay(view), set(wornCell(TASK.runUp), 90));
  expect(own.rows[0]?.cells[wornCell(TASK.runUp)]?.value).toBe(90);
  const shared = reduceDraft(own, set("worn", 95));
  expect(shared.rows[0]?.cells[wornCell(TASK.runUp)]).toBeUndefined();
});

describe("what is kept on the device", () => {
  test("comes back after a reload, by user, crew and date, and is gone when all is saved", () => {
    const storage = memoryStorage();
    const store = createDraftStore(storage, "user", "crew", "2026-11-30");
    const view = testDay(2);
    const draft = reduceDraft(openDay(view), type(1, 77));
    store.write(draft, { key: "key-of-the-request", body: "[]" });
    const stored = store.read();
    expect(stored?.pending?.key).toBe("key-of-the-request");
    const restored = restoreDraft(openDay(view), stored!);
    expect(restored.rows[0]).toEqual(draft.rows[0]);
    expect(createDraftStore(storage, "other", "crew", "2026-11-30").read()).toBeNull();
    store.write(openDay(view), null);
    expect(storage.length).toBe(0);
  });

  test("that somebody else has written over is no draft", () => {
    const storage = memoryStorage();
    const store = createDraftStore(storage, "user", "crew", "2026-11-30");
    store.write(reduceDraft(openDay(testDay(1)), type(1, 7)), null);
    storage.setItem(storage.key(0)!, "{broken");
    expect(store.read()).toBeNull();
  });
});

test("a newer revision on the server opens untouched rows anew and leaves typed ones to a choice", () => {
  const view = testDay([gridRow(1), gridRow(2)]);
  const draft = reduceDraft(openDay(view), type(1, 90));
  const newer = testDay([
    gridRow(1, { saved: savedShift(1) }),
    gridRow(2, { saved: savedShift(2) }),
  ]);
  const rebased = rebaseDraft(draft, newer);
  expect(rebased.rows[0]).toBe(draft.rows[0]);
  expect(isBehind(rebased.rows[0]!, newer.rows[0]!)).toBe(true);
  expect(isSettled(rebased.rows[1]!, newer.rows[1]!)).toBe(true);
});
