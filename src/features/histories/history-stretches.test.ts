import { describe, expect, test } from "vitest";
import {
  areSame,
  type Drawn,
  freePlace,
  moveStretch,
  nextTask,
  overlapOf,
  resizeStretch,
  snap,
  snapStepS,
  stretchBetween,
  toStretches,
} from "./history-stretches";

const grinding = "00000000-0000-4000-8000-000000000001";
const welding = "00000000-0000-4000-8000-000000000002";
const HOUR = 3600;
const lengthS = 8 * HOUR;
const limits = { lengthS, shortestS: 1 };

const task = (key: string, fromH: number, toH: number, taskId = grinding): Drawn => ({
  kind: "task",
  taskId,
  fromS: fromH * HOUR,
  toS: toH * HOUR,
  key,
});
const leftOut = (key: string, fromH: number, toH: number): Drawn => ({
  kind: "left-out",
  reason: "Knocked microphone",
  fromS: fromH * HOUR,
  toS: toH * HOUR,
  key,
});
const hoursOf = (drawn: readonly Drawn[], key: string) => {
  const one = drawn.find((stretch) => stretch.key === key);
  return one && [one.fromS / HOUR, one.toS / HOUR];
};

describe("moving a bracket", () => {
  test("goes where it is sent, and keeps its length", () => {
    const { drawn, stoppedBy } = moveStretch([task("a", 1, 3)], "a", HOUR, lengthS);
    expect(hoursOf(drawn, "a")).toEqual([2, 4]);
    expect(stoppedBy).toBeNull();
  });

  test("stops at another task, and names it", () => {
    const before = [task("a", 1, 3), task("b", 4, 5, welding)];
    const { drawn, stoppedBy } = moveStretch(before, "a", 3 * HOUR, lengthS);
    expect(hoursOf(drawn, "a")).toEqual([2, 4]);
    expect(stoppedBy?.key).toBe("b");
  });

  test("stops at the ends of the history, which is nobody's fault", () => {
    const early = moveStretch([task("a", 1, 3)], "a", -5 * HOUR, lengthS);
    expect([hoursOf(early.drawn, "a"), early.stoppedBy]).toEqual([[0, 2], null]);
    const late = moveStretch([task("a", 1, 3)], "a", 9 * HOUR, lengthS);
    expect([hoursOf(late.drawn, "a"), late.stoppedBy]).toEqual([[6, 8], null]);
  });

  test("touching its neighbour it can't go further, but can go back", () => {
    const before = [task("a", 0, 2), task("b", 2, 4, welding)];
    expect(hoursOf(moveStretch(before, "b", -HOUR, lengthS).drawn, "b")).toEqual([2, 4]);
    expect(moveStretch(before, "b", -HOUR, lengthS)).toMatchObject({
      stoppedBy: { key: "a" },
      side: "before",
    });
    expect(moveStretch(before, "a", HOUR, lengthS)).toMatchObject({
      stoppedBy: { key: "b" },
      side: "after",
    });
    expect(hoursOf(moveStretch(before, "b", HOUR, lengthS).drawn, "b")).toEqual([3, 5]);
  });

  test("what is left out lies over tasks freely", () => {
    const before = [task("a", 1, 3), leftOut("x", 4, 5)];
    const { drawn, stoppedBy } = moveStretch(before, "x", -3 * HOUR, lengthS);
    expect([hoursOf(drawn, "x"), stoppedBy]).toEqual([[1, 2], null]);
  });
});

describe("bringing an end of a bracket to a time", () => {
  const before = [task("a", 2, 3), task("b", 5, 6, welding)];

  test("either end", () => {
    expect(hoursOf(resizeStretch(before, "a", "to", 4 * HOUR, limits).drawn, "a")).toEqual([2, 4]);
    expect(hoursOf(resizeStretch(before, "a", "from", HOUR, limits).drawn, "a")).toEqual([1, 3]);
  });

  test("no further than the next bracket or the history", () => {
    const far = resizeStretch(before, "a", "to", 7 * HOUR, limits);
    expect([hoursOf(far.drawn, "a"), far.stoppedBy?.key]).toEqual([[2, 5], "b"]);
    const last = resizeStretch(before, "b", "to", 9 * HOUR, limits);
    expect([hoursOf(last.drawn, "b"), last.stoppedBy]).toEqual([[5, 8], null]);
  });

  test("never past its other end: the shortest remains", () => {
    const { drawn } = resizeStretch(before, "a", "to", HOUR, limits);
    expect(drawn.find(({ key }) => key === "a")).toMatchObject({
      fromS: 2 * HOUR,
      toS: 2 * HOUR + 1,
    });
  });
});

describe("drawing a bracket", () => {
  const before = [task("a", 2, 3)];

  test("forwards and backwards, cut at the next one", () => {
    expect(stretchBetween(before, "task", HOUR, 1.5 * HOUR, lengthS)).toEqual({
      fromS: HOUR,
      toS: 1.5 * HOUR,
      stoppedBy: null,
    });
    expect(stretchBetween(before, "task", 5 * HOUR, HOUR, lengthS)).toEqual({
      fromS: 3 * HOUR,
      toS: 5 * HOUR,
      stoppedBy: before[0],
    });
  });

  test("not from inside one of its kind; a left-out stretch may begin there", () => {
    expect(stretchBetween(before, "task", 2.5 * HOUR, 4 * HOUR, lengthS)).toBeNull();
    expect(stretchBetween(before, "left-out", 2.5 * HOUR, 4 * HOUR, lengthS)).not.toBeNull();
  });
});

describe("the place of the next bracket", () => {
  test("after the last, as long as the task; shorter where less is left", () => {
    expect(freePlace([task("a", 0, 2)], "task", HOUR, lengthS)).toEqual({
      fromS: 2 * HOUR,
      toS: 3 * HOUR,
    });
    expect(freePlace([task("a", 0, 7.5)], "task", HOUR, lengthS)).toEqual({
      fromS: 7.5 * HOUR,
      toS: lengthS,
    });
  });

  test("else the first gap, and nowhere in a full history", () => {
    const gap = [task("a", 0, 2), task("b", 3, 8, welding)];
    expect(freePlace(gap, "task", 2 * HOUR, lengthS)).toEqual({ fromS: 2 * HOUR, toS: 3 * HOUR });
    expect(freePlace([task("a", 0, 8)], "task", HOUR, lengthS)).toBeNull();
  });

  test("the task that comes next is the first without a bracket", () => {
    const tasks = [{ id: grinding }, { id: welding }];
    expect(nextTask(tasks, [task("a", 0, 2)])).toEqual({ id: welding });
    expect(nextTask([], [])).toBeNull();
  });
});

test("brackets that touch do not overlap, whatever a binary fraction says", () => {
  const before = [task("a", 1, 2)];
  const at = (fromS: number, toS: number) => overlapOf(before, { kind: "task", fromS, toS }, null);
  expect(at(2 * HOUR, 3 * HOUR)).toBeNull();
  expect(at(2 * HOUR - 1e-9, 3 * HOUR)).toBeNull();
  expect(at(2 * HOUR - 1, 3 * HOUR)?.key).toBe("a");
  expect(
    overlapOf(before, { kind: "task", fromS: HOUR, toS: 2 * HOUR }, "a"),
    "itself is no hindrance",
  ).toBeNull();
});

describe("snapping", () => {
  // Starts 37 s past a minute of the clock.
  const startMs = Date.parse("2026-11-30T06:00:37Z");

  test("to the clock's minutes, not the history's", () => {
    expect(snap(100, 60, startMs, lengthS)).toBe(83); // 06:02:00
  });

  test("an end of the history that is nearer wins", () => {
    expect(snap(5, 60, startMs, lengthS)).toBe(0);
    expect(snap(lengthS - 3, 60, startMs, lengthS)).toBe(lengthS);
  });

  test("the finer, the closer one looks, and never finer than the values", () => {
    expect([4 * HOUR, HOUR, 300].map((spanS) => snapStepS(spanS, 0.125))).toEqual([60, 10, 1]);
    expect(snapStepS(300, 10)).toBe(10);
  });
});

test("what is sent has no keys and stands in order; the order makes no other drawing", () => {
  const drawn = [leftOut("x", 1, 2), task("b", 3, 4), task("a", 0, 1)];
  const sent = toStretches(drawn);
  expect(sent.map(({ kind, fromS }) => [kind, fromS])).toEqual([
    ["task", 0],
    ["task", 3 * HOUR],
    ["left-out", HOUR],
  ]);
  expect(sent.every((one) => !("key" in one))).toBe(true);
  expect(areSame(drawn, sent)).toBe(true);
  expect(areSame(drawn, sent.slice(1))).toBe(false);
});
