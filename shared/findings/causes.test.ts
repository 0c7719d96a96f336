import { expect, test } from "vitest";
import {
  buildDay,
  buildLevel,
  buildShift,
  buildTask,
  STEADY,
} from "../../tests/published/build-day";
import { evaluateDay } from "../acoustics/day";
import type { PeakLevel } from "../acoustics/types";
import { ruleSetInForce } from "../rule-sets";
import { findCauses } from "./causes";
import { isNotified } from "./notified";

const DATE = "2026-03-02";

function peaksOf(key: string, peak: PeakLevel, lasMaxDb: number | null = null) {
  const governing = ruleSetInForce(key, DATE);
  if (!governing) throw new Error(`${key} is in force`);
  const task = buildTask("chipping", 480, buildLevel(79, { metric: STEADY, peak, lasMaxDb }));
  const input = buildDay([buildShift(480, [task])]);
  return findCauses(input, evaluateDay(input, governing, []), governing).filter(
    ({ kind }) => kind === "peak-or-ceiling",
  );
}

// The values are those of the directive's article 3 and the regulations' regulation 4: 135, 137 and 140 dB(C).
test.each([
  [134.9, undefined],
  [135, "lower-action-peak"],
  [136.9, "lower-action-peak"],
  [138.6, "upper-action-peak"],
  [140.2, "limit-peak"],
])("UK: of a peak of %d dB(C) the highest value that it exceeds counts: %s", (levelDb, id) => {
  const causes = peaksOf("uk-2005", { levelDb, weighting: "C" });
  expect(causes.map(({ criterion }) => criterion)).toEqual(id ? [`uk-2005:${id}`] : []);
});

test("a peak over an action value is one finding of the group, and nobody is mailed", () => {
  const [cause] = peaksOf("uk-2005", { levelDb: 138.6, weighting: "C" });
  expect(cause).toMatchObject({
    concerns: "job",
    facts: { levelDb: 138.6, valueDb: 137, criterionId: "upper-action-peak", weighting: "C" },
  });
  expect(isNotified(cause!)).toBe(false);
});

test("a limit on the peak concerns the worker, who is told", () => {
  const [cause] = peaksOf("us-general-industry", { levelDb: 141.6, weighting: "C" });
  expect(cause).toMatchObject({ concerns: "worker", criterion: "us-general-industry:peak" });
  expect(isNotified(cause!)).toBe(true);
});

test("US: a peak and a ceiling are two things to act on", () => {
  const causes = peaksOf("us-general-industry", { levelDb: 141.6, weighting: "C" }, 116);
  expect(causes.map(({ criterion }) => criterion)).toEqual([
    "us-general-industry:ceiling",
    "us-general-industry:peak",
  ]);
});
