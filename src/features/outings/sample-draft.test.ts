import { describe, expect, test } from "vitest";
import { Unreadable } from "../../components/form";
import {
  createSampleDraftStore,
  elapsedMin,
  nextOf,
  type SampleDraft,
  timerText,
  toSend,
} from "./sample-draft";
import {
  emptySample,
  SampleFields,
  type SampleValues,
  startOf,
  toSampleInput,
} from "./sample-fields";

const id = "00000000-0000-4000-8000-000000000001";
const values = {
  ...emptySample,
  taskId: id,
  instrumentId: id,
  levelDb: 94.6,
  durationMin: 6,
  place: " second bench ",
};

test("a draft outlives the page, and belongs to one person", () => {
  const draft: SampleDraft = {
    values,
    files: [],
    timerStartedAt: "2026-12-01T08:00:00.000Z",
    pending: null,
  };
  createSampleDraftStore(localStorage, "one").write(draft);
  expect(createSampleDraftStore(localStorage, "one").read()).toEqual(draft);
  expect(createSampleDraftStore(localStorage, "another").read()).toBeNull();
  createSampleDraftStore(localStorage, "one").write(null);
  expect(createSampleDraftStore(localStorage, "one").read()).toBeNull();
});

test("a level that can't be read is kept as it was typed, and is no level", () => {
  const typed = { ...values, levelDb: new Unreadable("ambiguous", "86,7") };
  const draft = { values: typed, files: [], timerStartedAt: null, pending: null };
  createSampleDraftStore(localStorage, "one").write(draft as unknown as SampleDraft);
  const found = createSampleDraftStore(localStorage, "one").read();
  expect(found?.values.levelDb).toBeInstanceOf(Unreadable);
  expect(found?.values.levelDb).toEqual(typed.levelDb);
});

test("what something else left in its place is no draft", () => {
  localStorage.setItem("dinward.sample.1.one", "{half a draf");
  expect(createSampleDraftStore(localStorage, "one").read()).toBeNull();
});

describe("the timer", () => {
  test("counts elapsed time, also over a reload", () => {
    expect(elapsedMin("2026-12-01T08:00:00Z", new Date("2026-12-01T08:05:35.900Z"))).toBe(5.5);
  });
  test.each([
    [0, "00:00"],
    [330, "05:30"],
    [3660, "61:00"],
  ])("%d s reads %s", (seconds, text) => {
    expect(timerText(seconds)).toBe(text);
  });
});

test("level, time, task and instrument are needed; all else may stay empty", () => {
  const issues = SampleFields.safeParse(emptySample).error?.issues ?? [];
  expect(issues.map(({ path }) => path.join("."))).toEqual([
    "levelDb",
    "durationMin",
    "taskId",
    "instrumentId",
  ]);
  expect(SampleFields.safeParse(values).success).toBe(true);
});

test("is sent under the site's date, with what the instrument showed as doubts", () => {
  const sent = toSampleInput(
    { ...values, isClipped: true, peakDb: 131 },
    {
      // Half past midnight in Berlin.
      startedAt: "2026-11-30T23:30:00.000Z",
      surveyId: null,
      timeZone: "Europe/Berlin",
      fileIds: [],
      isDoubtful: true,
    },
  );
  expect(sent).toMatchObject({
    date: "2026-12-01",
    place: "second bench",
    doubts: ["clipped"],
    peak: { levelDb: 131, weighting: "C" },
  });
});

describe("when a sample began", () => {
  const now = new Date("2026-12-01T08:06:00Z");
  const at = (given: Partial<SampleValues>) =>
    startOf({ ...values, ...given }, now, "Europe/Berlin");

  test("of which only the length was typed: it ended just now", () => {
    expect(at({})).toEqual({ kind: "at", instant: "2026-12-01T08:00:00.000Z" });
    expect(at({ durationMin: null })).toBeNull();
  });

  test("by its timer, however long ago that was", () => {
    expect(at({ startedAt: "2026-12-01T07:30:00.000Z" })).toEqual({
      kind: "at",
      instant: "2026-12-01T07:30:00.000Z",
    });
  });

  test("as typed in from the field sheet, by the clock of the site", () => {
    const typed = { takenOn: "2026-11-27", takenFrom: "14:20" };
    expect(at({ ...typed, startedAt: "2026-12-01T07:30:00.000Z" })).toEqual({
      kind: "at",
      instant: "2026-11-27T13:20:00.000Z",
    });
    // In Berlin the clock showed 02:30 twice on 25 October 2026.
    expect(at({ takenOn: "2026-10-25", takenFrom: "02:30" })).toEqual({
      kind: "twice",
    });
  });
});

describe("what is sent", () => {
  const context = {
    startedAt: "2026-12-01T08:00:00.000Z",
    surveyId: null,
    timeZone: "UTC",
    fileIds: [],
  };
  const typed = { ...values, keptReason: "the whole task takes two minutes" };

  test("leaves a reason out that outlived its doubt", () => {
    expect(toSampleInput(typed, { ...context, isDoubtful: true }).keptReason).toBe(
      "the whole task takes two minutes",
    );
    expect(toSampleInput(typed, { ...context, isDoubtful: false }).keptReason).toBeNull();
  });

  test("is the same sample when it was lost on the way, and another one once it was refused", () => {
    let count = 0;
    const newKey = () => `key ${++count}`;
    const body = toSampleInput(values, { ...context, isDoubtful: false });
    const first = toSend(body, true, null, newKey);
    const later = { ...body, startedAt: "2026-12-01T08:02:00.000Z" };
    expect(toSend(later, true, first.pending, newKey)).toEqual(first);
    // Its start was not derived: the later time was meant.
    expect(toSend(later, false, first.pending, newKey).body).toEqual(later);
    expect(toSend(later, true, null, newKey)).toMatchObject({ body: later });
    expect(toSend({ ...later, levelDb: 90 }, true, first.pending, newKey).body).toMatchObject({
      startedAt: "2026-12-01T08:02:00.000Z",
    });
  });
});

test("the next sample keeps task, instrument and place, and no figure", () => {
  const next = nextOf({ ...values, checkBeforeDb: 94, unusual: "door open" });
  expect(next).toMatchObject({
    taskId: id,
    instrumentId: id,
    place: " second bench ",
    checkBeforeDb: 94,
    levelDb: null,
    durationMin: null,
    unusual: null,
  });
});
