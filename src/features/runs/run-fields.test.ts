import { expect, test } from "vitest";
import {
  driftDb,
  emptyReading,
  isDriftTooLarge,
  NewRunFields,
  type RunFormValues,
} from "./run-fields";

const id = "00000000-0000-4000-8000-000000000001";
const settings = {
  criterionLevelDb: 90,
  exchangeRateDb: 5 as const,
  thresholdDb: 80,
  weighting: "A" as const,
  response: "slow" as const,
};
const values = (overrides: Partial<RunFormValues> = {}): RunFormValues => ({
  instrumentId: id,
  workerId: id,
  date: "2026-11-30",
  durationMin: 480,
  checkBeforeDb: 114,
  checkAfterDb: 114,
  covers: "shift",
  keptReason: null,
  unusual: null,
  readings: [{ ...emptyReading(settings), averageDb: 84.1 }],
  reason: null,
  ...overrides,
});
const issuesOf = (input: RunFormValues) =>
  (NewRunFields.safeParse(input).error?.issues ?? []).map((issue) => issue.path.join("."));

test("a whole run passes as the server would take it", () => {
  expect(issuesOf(values())).toEqual([]);
});

test("field checks 0.6 dB apart need a reason; 0.5 dB do not (ISO 9612)", () => {
  expect(issuesOf(values({ checkAfterDb: 113.4 }))).toEqual(["keptReason"]);
  expect(issuesOf(values({ checkAfterDb: 113.4, keptReason: "the calibrator was cold" }))).toEqual(
    [],
  );
  expect(issuesOf(values({ checkAfterDb: 113.5 }))).toEqual([]);
  expect(isDriftTooLarge(driftDb(114, 113.5))).toBe(false);
  expect(driftDb(114, null)).toBeNull();
});

test("an empty settings row and a peak out of range are named where they stand", () => {
  expect(issuesOf(values({ readings: [emptyReading(settings)] }))).toEqual([
    "readings.0.averageDb",
  ]);
  expect(
    issuesOf(values({ readings: [{ ...emptyReading(settings), averageDb: 84, peakDb: 300 }] })),
  ).toEqual(["readings.0.peakDb"]);
});

test("minutes and worker that are missing are not taken for nothing", () => {
  expect(issuesOf(values({ durationMin: null, workerId: null })).sort()).toEqual([
    "durationMin",
    "workerId",
  ]);
});
