import { describe, expect, test } from "vitest";
import type { GridRow } from "../../../shared/schemas/shift";
import { parseCell, type UnaccountedWords } from "./cells";
import { type CellId, taskCell } from "./columns";
import { type DayDraft, openDay, type RowDraft, reduceDraft } from "./draft";
import { createRowEvaluator, withoutProtector } from "./evaluate-rows";
import { gridRow, INSTRUMENT, savedShift, TASK, testDay, workerId } from "./test-day";

const words: UnaccountedWords = {
  quiet: "quiet",
  likeTheRest: "like the rest",
  unknown: "unknown",
};

function typed(draft: DayDraft, entries: Partial<Record<CellId, string>>): RowDraft {
  const changes = (Object.entries(entries) as [CellId, string][]).map(([cell, text]) => ({
    workerId: workerId(1),
    cell,
    value: parseCell(cell, text, "en", words),
  }));
  return reduceDraft(draft, { type: "set-cells", changes }).rows[0]!;
}

function evaluate(entries: Partial<Record<CellId, string>>, row: Partial<GridRow> = {}, more = {}) {
  const view = testDay([gridRow(1, row)], more);
  return createRowEvaluator(view)(typed(openDay(view), entries));
}

test("levels without protection and at the ear are there while typing", () => {
  // By hand: 10 lg((60·10^8.4 + 120·10^10 + 300·10^7)/480) = 94.044.
  const { summary, problems } = evaluate({});
  expect(problems).toEqual([]);
  expect(summary?.outsideDb).toBeCloseTo(94.044, 3);
  expect(summary?.atEarDb).toBeLessThan(94.044);
});

test("a reading far past the most that the tasks leave possible is asked about, with the bound", () => {
  const view = testDay([gridRow(1, { nominal: [{ taskId: TASK.teardown, durationMin: 480 }] })]);
  const usual = {
    criterionLevelDb: 90,
    exchangeRateDb: 5 as const,
    thresholdDb: 80,
    weighting: "A" as const,
    response: "slow" as const,
  };
  const us = {
    ...view,
    settings: { ...view.settings, governingRuleSet: "us-general-industry" },
    instruments: view.instruments.map((one) => ({ ...one, presets: [usual] })),
    tasks: view.tasks.map((task) => ({
      ...task,
      level: task.level && { ...task.level, metric: { kind: "laeq" as const } },
    })),
  };
  const found = (dose: string) => {
    const row = typed(openDay(us), { reading: dose });
    return createRowEvaluator(us)({
      ...row,
      runSetup: {
        instrumentId: INSTRUMENT,
        settings: usual,
        further: [],
        durationMin: null,
        covers: "shift",
      },
    });
  };
  // By hand: an LAeq of 92 bounds the 5 dB average by 92; 400 % is a TWA of 90 + 16.61·lg 4 = 100.0 (the rule rounds 16.6096).
  const far = found("400 %").questions[0];
  expect(far).toMatchObject({ kind: "far-off", tasksBound: "upper" });
  expect(far?.kind === "far-off" && far.tasksDb).toBeCloseTo(92, 3);
  expect(far?.kind === "far-off" && far.gapDb).toBeCloseTo(8.0, 2);
  // Within the bound the two do not contradict each other, however far below it the reading lies.
  const below = found("25 %");
  expect(below.questions).toEqual([]);
  expect(below.besideReading).toMatchObject({ tasksBound: "upper", gapDb: null });
});

test("more minutes than the shift: what is over, which cell, and nothing worked out", () => {
  const found = evaluate(
    { [taskCell(TASK.runUp)]: "165" },
    { longestMin: { [TASK.runUp]: 100, [TASK.control]: 400 } },
  );
  expect(found.problems).toEqual([
    {
      kind: "does-not-add-up",
      cell: taskCell(TASK.runUp),
      sumMin: 525,
      lengthMin: 480,
      overMin: 45,
      longest: { taskName: "Run-up", longestMin: 100 },
    },
  ]);
  expect(found.values).toBeNull();
  expect(found.summary).toBeNull();
});

test.each([
  [{ start: "25:00" }, "fault"],
  [{ start: "" }, "start-missing"],
  [{ length: "" }, "length-missing"],
  [{ length: "25h" }, "length-out-of-range"],
  [{ length: "480.5" }, "not-whole-minutes"],
  [{ length: "24h" }, "whole-day"],
  [{ [taskCell(TASK.runUp)]: "-10" }, "fault"],
] as const)("%o: %s", (entries, kind) => {
  expect(evaluate(entries).problems.map((problem) => problem.kind)).toContain(kind);
});

test("a shift of no length is said to be that, and nothing else", () => {
  expect(evaluate({ length: "0" }).problems.map(({ kind }) => kind)).toEqual([
    "length-out-of-range",
  ]);
});

describe("where the clock was set", () => {
  test("forward, a time that never came is refused", () => {
    const found = evaluate({ start: "1:30" }, {}, { date: "2026-03-29" });
    expect(found.problems).toMatchObject([{ kind: "time-skipped", time: "01:30" }]);
  });

  test("back, a time that came twice is asked for", () => {
    const view = testDay([gridRow(1)], { date: "2026-10-25" });
    const row = typed(openDay(view), { start: "1:30" });
    const evaluateRow = createRowEvaluator(view);
    expect(evaluateRow(row).problems).toMatchObject([{ kind: "time-twice" }]);
    expect(evaluateRow({ ...row, whichHour: "second" }).problems).toEqual([]);
  });
});

describe("what is unlikely is asked about", () => {
  test("a stay far beyond the longest of a year, until somebody says that it is right", () => {
    const view = testDay([gridRow(1, { longestMin: { [TASK.runUp]: 100 } })]);
    const evaluateRow = createRowEvaluator(view);
    const row = typed(openDay(view), { [taskCell(TASK.runUp)]: "135", length: "9h" });
    const [question] = evaluateRow(row).questions;
    expect(question).toMatchObject({ kind: "long-stay", durationMin: 135, longestMin: 100 });
    expect(evaluateRow({ ...row, answered: [question!.key] }).questions).toEqual([]);
  });

  test("a stay a little longer is not", () => {
    const found = evaluate(
      { [taskCell(TASK.runUp)]: "120" },
      { longestMin: { [TASK.runUp]: 100 } },
    );
    expect(found.questions).toEqual([]);
  });

  test.each([
    ["100.1", 1],
    ["99.9", 0],
  ])("a reading of %s where the tasks give 94.04: %d question", (level, count) => {
    const view = testDay([gridRow(1)]);
    const row = typed(openDay(view), { reading: level });
    const [settings] = view.instruments[0]!.presets;
    const runSetup = {
      instrumentId: INSTRUMENT,
      settings: settings!,
      further: [],
      durationMin: null,
      covers: "shift" as const,
    };
    const found = createRowEvaluator(view)({ ...row, runSetup });
    expect(found.problems).toEqual([]);
    expect(found.questions).toHaveLength(count);
    expect(found.summary?.outsideDb).toBeCloseTo(Number(level), 6);
  });
});

test("unknown wearing time is not taken for 100 %", () => {
  const { summary } = evaluate({ worn: "" });
  expect(summary?.verdictAtEar).not.toBe("under");
});

test("another shift of the day leaves the day to the server", () => {
  const found = evaluate(
    { start: "18:00", length: "120", [taskCell(TASK.runUp)]: "60" },
    {
      otherShifts: [
        { shiftId: savedShift(9).shiftId, crewName: null, localStart: "18:00", lengthMin: 120 },
      ],
    },
  );
  expect(found.summary).toBeNull();
  expect(found.values).not.toBeNull();
});

test("a row that has not changed answers from memory", () => {
  const view = testDay(2);
  const evaluateRow = createRowEvaluator(view);
  const draft = openDay(view);
  const first = evaluateRow(draft.rows[1]!);
  typed(draft, { worn: "50" });
  expect(evaluateRow(draft.rows[1]!)).toBe(first);
});

test("ten minutes without the protector raise the day by what its wearing time gives", () => {
  const view = testDay([gridRow(1)]);
  const found = createRowEvaluator(view)(openDay(view).rows[0]!);
  const bare = withoutProtector(found, view, 10)!;
  expect(bare.taskName).toBe("Run-up");
  // By hand: ten more minutes at 100 dB in place of the same under the muff.
  const worn = found.evaluation!.tasks.find(({ isWorn }) => isWorn)!.wornDb!;
  const energy = 480 * 10 ** (found.summary!.atEarDb! / 10) + 10 * (10 ** 10 - 10 ** (worn / 10));
  expect(bare.atEarDb).toBeCloseTo(10 * Math.log10(energy / 480), 6);
});

test("an absent worker whose shift is saved says so", () => {
  const view = testDay([gridRow(1, { saved: savedShift(1) })]);
  const [row] = openDay(view).rows;
  const found = createRowEvaluator(view)({ ...row!, isAbsent: true, isTouched: true });
  expect(found.problems).toMatchObject([{ kind: "shift-saved" }]);
});
