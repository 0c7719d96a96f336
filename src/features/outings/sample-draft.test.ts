import { describe, expect, test } from "vitest";
import {
  createSampleDraftStore,
  elapsedMin,
  nextOf,
  type SampleDraft,
  timerText,
} from "./sample-draft";
import { emptySample, SampleFields, startOf, toSampleInput } from "./sample-fields";

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
    },
  );
  expect(sent).toMatchObject({
    date: "2026-12-01",
    place: "second bench",
    doubts: ["clipped"],
    peak: { levelDb: 131, weighting: "C" },
  });
});

test("a sample of which only the length was typed ended just now", () => {
  expect(startOf(6, new Date("2026-12-01T08:06:00Z"))).toBe("2026-12-01T08:00:00.000Z");
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
