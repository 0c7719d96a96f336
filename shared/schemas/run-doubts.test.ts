import { describe, expect, test } from "vitest";
import { type DoubtfulFacts, findRunDoubts, likelyCovers } from "./run-doubts";

const sound: DoubtfulFacts = {
  checkBeforeDb: 94.0,
  checkAfterDb: 94.0,
  date: "2026-03-02",
  calibration: { dueOn: "2026-03-02", failedOn: null },
  durationMin: 5,
  leastMin: 5,
  needsChecks: false,
  covers: "shift",
  shift: null,
  shown: [],
};
const codes = (facts: Partial<DoubtfulFacts>) =>
  findRunDoubts({ ...sound, ...facts }).map(({ code }) => code);

// ISO 9612:2009, 12.2: discarded where the field checks differ by more than 0.5 dB.
describe("field checks", () => {
  test.each([
    [94.0, 94.5],
    [94.5, 94.0],
    [113.9, 114.4],
    [94.1, null],
    [null, null],
  ])("%s and %s raise no doubt", (checkBeforeDb, checkAfterDb) => {
    expect(codes({ checkBeforeDb, checkAfterDb })).toEqual([]);
  });

  test.each([
    [94.0, 94.51],
    [94.0, 93.4],
    [114.0, 109.0],
  ])("%s and %s have drifted", (checkBeforeDb, checkAfterDb) => {
    expect(codes({ checkBeforeDb, checkAfterDb })).toEqual(["field-check-drift"]);
  });

  test.each([
    [114.0, 94.0],
    [94.0, 113.8],
    [94.0, 99.1],
    [84.0, 84.0],
    [49.0, null],
    [null, 129.5],
  ])("%s and %s were mistyped, and nothing is said of drift", (checkBeforeDb, checkAfterDb) => {
    expect(codes({ checkBeforeDb, checkAfterDb })).toEqual(["field-check-mistyped"]);
  });
});

test("a certificate holds on the very day on which it runs out, and not on the next", () => {
  expect(codes({ date: "2026-03-02" })).toEqual([]);
  expect(codes({ date: "2026-03-03" })).toEqual(["calibration-out-of-date"]);
  expect(codes({ calibration: { dueOn: null, failedOn: null }, date: "2030-01-01" })).toEqual([]);
});

test("a calibration that it failed is not called out of date", () => {
  expect(codes({ calibration: { dueOn: "2026-01-01", failedOn: "2026-02-01" } })).toEqual([
    "calibration-failed",
  ]);
});

test("a run may not be shorter than what is asked for; while it is out it has no length", () => {
  expect(codes({ durationMin: 4.99 })).toEqual(["run-too-short"]);
  expect(codes({ durationMin: null })).toEqual([]);
  expect(codes({ durationMin: 1, leastMin: null })).toEqual([]);
});

test("what the instrument showed is a doubt each", () => {
  expect(codes({ shown: ["clipped", "under-range"] })).toEqual(["clipped", "under-range"]);
});

describe("a run and the shift that it speaks for", () => {
  const eight = { from: "14:00", to: "22:00", shiftMin: 480 };

  // Nine tenths of the time at one level are 10 lg 0.9 = −0.46 dB of the shift's energy.
  test.each([
    [432, []],
    [431, ["shorter-than-shift"]],
    [60, ["shorter-than-shift"]],
  ])("%i min of eight hours", (durationMin, found) => {
    expect(codes({ durationMin, shift: { ...eight, insideMin: durationMin } })).toEqual(found);
    expect(codes({ durationMin, shift: { ...eight, insideMin: null } })).toEqual(found);
  });

  test("an hour in the morning says nothing about an afternoon's shift", () => {
    const morning = { durationMin: 60, shift: { ...eight, insideMin: 0 } };
    expect(codes(morning)).toEqual(["outside-shift"]);
    expect(codes({ ...morning, covers: "projected" })).toEqual(["outside-shift"]);
    // Only evidence: it does not govern.
    expect(codes({ ...morning, covers: "part" })).toEqual([]);
  });

  test("worn for eight hours of which six lie in the shift, it covers six", () => {
    const late = { durationMin: 480, shift: { ...eight, insideMin: 360 } };
    expect(codes(late)).toEqual(["shorter-than-shift"]);
    expect(codes({ ...late, covers: "projected" })).toEqual([]);
  });

  test("what it most likely covers follows from overlap and length", () => {
    expect(likelyCovers({ ...eight, insideMin: 470 }, 470)).toBe("shift");
    expect(likelyCovers({ ...eight, insideMin: 60 }, 60)).toBe("part");
    expect(likelyCovers({ ...eight, insideMin: 0 }, 60)).toBe("part");
    expect(likelyCovers(null, 480)).toBeNull();
    // Half an hour later than the shift at both ends: its clock may be wrong, or it is another's shift.
    const offset = { ...eight, insideMin: 450 };
    expect(likelyCovers({ ...offset, startOffMin: 30, endOffMin: 30 }, 480)).toBeNull();
    expect(likelyCovers({ ...offset, startOffMin: -30, endOffMin: -30 }, 480)).toBeNull();
    // Put on early and taken off late; or a little late at both ends.
    const whole = { ...eight, insideMin: 480 };
    expect(likelyCovers({ ...whole, startOffMin: -20, endOffMin: 20 }, 520)).toBe("shift");
    expect(likelyCovers({ ...offset, startOffMin: 8, endOffMin: 8 }, 480)).toBe("shift");
  });
});

test("a field check that is missing is asked about once the run is over", () => {
  const sample = { needsChecks: true };
  expect(codes({ ...sample, checkAfterDb: null })).toEqual(["field-check-missing"]);
  expect(codes({ ...sample, checkBeforeDb: null, checkAfterDb: null })).toEqual([
    "field-check-missing",
  ]);
  expect(codes({ ...sample, checkAfterDb: null, durationMin: null })).toEqual([]);
  expect(codes({ checkAfterDb: null })).toEqual([]);
});
