import { describe, expect, test } from "vitest";
import type { DaySaveView } from "../../../shared/schemas/shift";
import { DayRowInput } from "../../../shared/schemas/shift";
import { cellOf } from "./cells";
import { taskCell } from "./columns";
import { differences, mergeRow, savedRow } from "./conflicts";
import { type DayDraft, isBehind, isSettled, openDay, reduceDraft } from "./draft";
import { createRowEvaluator } from "./evaluate-rows";
import { collectRows, countRows, draftAfter, viewAfter } from "./save";
import { gridRow, INSTRUMENT, savedShift, TASK, testDay, workerId } from "./test-day";

const entryId = "00000000-0000-4000-8000-000000009999";
const noNotices = {
  entryId,
  notBefore: null,
  state: "none" as const,
  people: 0,
  notices: [],
  correctedAt: null,
};
const reply = (more: Partial<DaySaveView>): DaySaveView => ({
  entryId,
  saved: [],
  refused: [],
  conflicts: [],
  notices: noNotices,
  ...more,
});
const type = (draft: DayDraft, number: number, minutes: number, taskId: string = TASK.runUp) =>
  reduceDraft(draft, {
    type: "set-cells",
    changes: [
      { workerId: workerId(number), cell: taskCell(taskId), value: cellOf(minutes, "typed") },
    ],
  });
const collect = (draft: DayDraft, view: ReturnType<typeof testDay>, reason: string | null = null) =>
  collectRows(draft, view, createRowEvaluator(view), reason);

test("only rows that somebody spoke for and that stand are sent", () => {
  const view = testDay(4);
  let draft = type(openDay(view), 1, 90);
  draft = type(draft, 2, 900);
  draft = reduceDraft(draft, { type: "set-absent", workerId: workerId(3), isAbsent: true });
  const { rows } = collect(draft, view);
  expect(rows.map(({ kind, workerId: who }) => [kind, who])).toEqual([
    ["worked", workerId(1)],
    ["absent", workerId(3)],
  ]);
  for (const row of rows) expect(DayRowInput.safeParse(row).success).toBe(true);
  expect(countRows(draft, view)).toEqual({ settled: 0, waiting: 4 });
});

test("a wearing time of the whole shift is sent as such, task by task", () => {
  const view = testDay(1);
  const [row] = collect(type(openDay(view), 1, 90), view).rows;
  expect(row).toMatchObject({
    kind: "worked",
    tasks: expect.arrayContaining([
      { taskId: TASK.runUp, durationMin: 90, wornPct: 100, wornIsShiftWide: true },
    ]),
  });
});

describe("a saved shift that changes", () => {
  const view = testDay([gridRow(1, { saved: savedShift(1, 4) })]);

  test("is a correction of its revision, with the reason", () => {
    const { rows, corrections } = collect(type(openDay(view), 1, 100), view, "typed wrongly");
    expect(corrections).toEqual([workerId(1)]);
    expect(rows[0]).toMatchObject({ revision: 4, reason: "typed wrongly" });
  });

  test("and is typed back to what is saved, is nothing to send", () => {
    const draft = type(type(openDay(view), 1, 100), 1, 120);
    const collected = collect(draft, view);
    expect(collected.rows).toEqual([]);
    expect(collected.unchanged).toEqual([workerId(1)]);
    const after = draftAfter(draft, view, reply({}), collected);
    expect(isSettled(after.rows[0]!, view.rows[0]!)).toBe(true);
  });
});

test("an absence taken back goes with the shift that was worked", () => {
  const view = testDay([gridRow(1, { isAbsent: true })]);
  const back = reduceDraft(openDay(view), {
    type: "set-absent",
    workerId: workerId(1),
    isAbsent: false,
  });
  expect(collect(back, view).rows.map(({ kind }) => kind)).toEqual(["not-absent", "worked"]);
});

test("saved rows settle, refused ones keep what is wrong, what is typed meanwhile stays typed", () => {
  const view = testDay(3);
  const draft = [1, 2, 3].reduce((known, number) => type(known, number, 90), openDay(view));
  const collected = collect(draft, view);
  const whileSending = type(draft, 3, 80);
  const answer = reply({
    saved: [0, 2].map((index) => ({
      index,
      workerId: workerId(index + 1),
      shift: savedShift(index + 1),
      figures: null,
      readings: [],
    })),
    refused: [
      {
        index: 1,
        workerId: workerId(2),
        issues: [{ path: ["localStart"], code: "shifts-overlap", params: {} }],
      },
    ],
  });
  const after = viewAfter(view, answer, collected.rows);
  const next = draftAfter(whileSending, after, answer, collected);
  expect(isSettled(next.rows[0]!, after.rows[0]!)).toBe(true);
  expect(next.rows[1]?.refused).toHaveLength(1);
  expect(next.rows[2]).toMatchObject({ isTouched: true, base: { revision: 1 } });
  expect(next.rows[2]?.cells[taskCell(TASK.runUp)]?.value).toBe(80);
  expect(countRows(next, after)).toEqual({ settled: 1, waiting: 2 });
});

test("a row that met another's revision waits for a choice, field by field", () => {
  const view = testDay([gridRow(1, { saved: savedShift(1, 1) })]);
  const draft = type(openDay(view), 1, 100);
  const theirs = savedShift(1, 2);
  const current = {
    ...theirs,
    tasks: theirs.tasks.map((task) =>
      task.taskId === TASK.control ? { ...task, durationMin: 340 } : task,
    ),
  };
  const answer = reply({ conflicts: [{ index: 0, workerId: workerId(1), current }] });
  const after = viewAfter(view, answer, collect(draft, view, "reason").rows);
  const [row] = draftAfter(draft, after, answer, collect(draft, view, "reason")).rows;
  expect(isBehind(row!, after.rows[0]!)).toBe(true);

  const saved = savedRow(after.rows[0]!, current, after);
  const found = differences(row!, saved, [TASK.runUp, TASK.control]);
  expect(found.map(({ cell }) => cell)).toEqual([taskCell(TASK.runUp), taskCell(TASK.control)]);
  const merged = mergeRow(row!, saved, new Set([taskCell(TASK.runUp)]));
  expect(merged.base?.revision).toBe(2);
  expect(merged.cells[taskCell(TASK.runUp)]?.value).toBe(100);
  expect(merged.cells[taskCell(TASK.control)]?.value).toBe(340);
  expect(mergeRow(row!, saved, new Set()).isTouched).toBe(false);
});

describe("a run that is saved with two settings rows", () => {
  const id = (number: number) => `00000000-0000-4000-8000-${String(number).padStart(12, "0")}`;
  const settings = (thresholdDb: number) => ({
    criterionLevelDb: 90,
    exchangeRateDb: 5 as const,
    thresholdDb,
    weighting: "A" as const,
    response: "slow" as const,
  });
  const stored = (number: number, thresholdDb: number, averageDb: number) => ({
    runId: id(800),
    runRevision: 2,
    readingId: id(number),
    instrumentId: INSTRUMENT,
    instrumentClass: "dosimeter" as const,
    durationMin: 470,
    covers: "shift" as const,
    keptReason: null,
    settings: settings(thresholdDb),
    dosePct: 40,
    averageDb,
    lceqDb: null,
    lasMaxDb: 112,
    peak: null,
  });
  const view = testDay([
    gridRow(1, { saved: savedShift(1), readings: [stored(801, 80, 92), stored(802, 90, 90.5)] }),
  ]);
  const change = (value: ReturnType<typeof cellOf>) =>
    reduceDraft(openDay(view), {
      type: "set-cells",
      changes: [{ workerId: workerId(1), cell: "reading", value }],
    });

  test("keeps the one that nobody touched, with all that it says", () => {
    const draft = change(cellOf({ kind: "level", levelDb: 93 }, "typed"));
    const { rows, corrections } = collect(draft, view, "misread");
    expect(corrections).toEqual([workerId(1)]);
    expect(DayRowInput.safeParse(rows[0]).success).toBe(true);
    expect(rows[0]?.kind === "worked" && rows[0].run).toMatchObject({
      runId: id(800),
      runRevision: 2,
      readings: [
        { settings: settings(80), averageDb: 93, dosePct: null, lasMaxDb: 112 },
        { settings: settings(90), averageDb: 90.5, dosePct: 40, lasMaxDb: 112 },
      ],
    });
  });

  test("and is emptied, has to be struck where runs are", () => {
    const bare = { ...stored(801, 80, 92), lasMaxDb: null };
    const one = testDay([gridRow(1, { saved: savedShift(1), readings: [bare] })]);
    const draft = reduceDraft(openDay(one), {
      type: "set-cells",
      changes: [{ workerId: workerId(1), cell: "reading", value: cellOf(null, "typed") }],
    });
    const { problems } = createRowEvaluator(one)(draft.rows[0]!);
    expect(problems).toEqual([{ kind: "run-emptied", cell: "reading", runId: id(800) }]);
  });
});
