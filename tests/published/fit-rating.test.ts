import { describe, expect, test } from "vitest";
import { attenuationNeed } from "../../shared/acoustics/protection/attenuation-need";
import { boneConductionLimitDb } from "../../shared/acoustics/protection/bone-conduction";
import { type FitTrials, fitRating, groupFits } from "../../shared/acoustics/protection/fit-rating";
import { ruleSet } from "./build-day";
import "../setup/printed";

const TRIALS: FitTrials = {
  leftDb: [22, 26, 24],
  rightDb: [20, 21, 19],
  methodSdDb: 3,
  confidencePct: 84,
  needDb: 16,
};
const rated = (fields: Partial<FitTrials> = {}) => {
  const { rating } = fitRating({ ...TRIALS, ...fields });
  if (!rating) throw new Error("refused");
  return rating;
};

describe("by ear: mean less z·√(s²/n + u²), one-sided (computed by hand; z of printed normal tables)", () => {
  // Left: mean 24, s 2, u = √(4/3 + 9). Right: mean 20, s 1, u = √(1/3 + 9). z: 0.9945, 1.6449, 0.
  test.each([
    [84, 0.9945, "16.96"],
    [95, 1.6449, "14.97"],
    [50, 0, "20.00"],
  ])("%d %% of confidence, z = %d: PAR %s dB, of the right ear", (confidencePct, z, printed) => {
    const rating = rated({ confidencePct });
    expect(rating.parDb).toAgreeWithPrinted(printed);
    expect(rating).toMatchObject({ weakerEar: "right", confidencePct, hasSingleTrial: false });
    expect(rating.left?.uncertaintyDb).toBeCloseTo(Math.sqrt(4 / 3 + 9), 12);
    expect(rating.left?.parDb).toBeCloseTo(24 - z * Math.sqrt(4 / 3 + 9), 3);
  });

  test("the weaker ear is the one with less at that confidence, not with the lower mean", () => {
    const rating = rated({ leftDb: [15, 33, 24], rightDb: [23, 23, 23], confidencePct: 95 });
    expect(rating).toMatchObject({ weakerEar: "left" });
    expect(rating.left!.meanDb).toBeGreaterThan(rating.right!.meanDb);
  });

  test("a single trial has no spread: the method's own alone, and it says so", () => {
    const rating = rated({ leftDb: [24], rightDb: [23] });
    expect(rating).toMatchObject({ hasSingleTrial: true, weakerEar: "right" });
    expect(rating.right).toMatchObject({ betweenTrialsDb: null, uncertaintyDb: 3 });
  });

  test("one ear alone is said to be one", () => {
    expect(rated({ rightDb: [] })).toMatchObject({
      isOneEar: true,
      right: null,
      weakerEar: "left",
    });
  });

  test("one ear alone can fail for the pair, but not pass for it", () => {
    expect(rated({ rightDb: [], needDb: 16 }).hasPassed).toBeNull();
    expect(rated({ rightDb: [], needDb: 40 }).hasPassed).toBe(false);
  });
});

test.each([
  [16, true],
  [16.97, false],
  [0, null],
  [null, null],
])("against a need of %s dB: %s", (needDb, hasPassed) => {
  expect(rated({ needDb })).toMatchObject({ hasPassed });
});

describe("refused", () => {
  test("nothing tried", () => {
    expect(fitRating({ ...TRIALS, leftDb: [], rightDb: [] }).refusal).toMatchObject({
      code: "no-trial",
    });
  });

  test.each([
    [
      "all three",
      { leftDb: [47, 48, 46], confidencePct: 98 },
      { ear: "left", trial: 1, foundDb: 47 },
    ],
    ["one that its mean hides", { leftDb: [80, 24, 23] }, { ear: "left", trial: 1, foundDb: 80 }],
    ["of the right ear", { rightDb: [20, 21, 52] }, { ear: "right", trial: 3, foundDb: 52 }],
  ] as const)("a trial beyond what the skull lets be reached: %s", (_, trials, found) => {
    expect(fitRating({ ...TRIALS, ...trials }).refusal).toEqual({
      code: "above-bone-conduction",
      limitDb: boneConductionLimitDb(),
      ...found,
    });
  });

  test("a confidence that is none", () => {
    expect(() => fitRating({ ...TRIALS, confidencePct: 100 })).toThrow(RangeError);
  });
});

describe("a group's fits against the label", () => {
  test("mean 20, deviation 5, 6 dB under the label, one of three below its need (computed)", () => {
    const fits = [
      { parDb: 15, needDb: 18 },
      { parDb: 20, needDb: 18 },
      { parDb: 25, needDb: 20 },
    ];
    expect(groupFits(fits, 26)).toEqual({
      count: 3,
      meanDb: 20,
      sdDb: 5,
      againstLabelDb: -6,
      belowNeedPct: 100 / 3,
    });
  });

  test("one alone has no deviation; without a need no share; of nobody nothing", () => {
    expect(groupFits([{ parDb: 15, needDb: null }], null)).toEqual({
      count: 1,
      meanDb: 15,
      sdDb: null,
      againstLabelDb: null,
      belowNeedPct: null,
    });
    expect(() => groupFits([], 26)).toThrow(RangeError);
  });
});

describe("what a noise asks for", () => {
  const UK = ruleSet("uk-2005").protection;
  const US = ruleSet("us-general-industry").protection;

  test.each([
    // EN 458: the action value, and 15 dB under it too much (memory).
    [UK, 100, null, { needDb: 15, targetDb: 85, mostDb: 30 }],
    [UK, 100, 80, { needDb: 20, targetDb: 80, mostDb: 35 }],
    [UK, 100, 90, { needDb: 15, targetDb: 85, mostDb: 30 }],
    [UK, 82, null, { needDb: 0, targetDb: 85, mostDb: 12 }],
    // 1910.95 App. B: 90, 85 with a threshold shift; no upper end.
    [US, 100, null, { needDb: 10, targetDb: 90, mostDb: null }],
    [US, 100, 85, { needDb: 15, targetDb: 85, mostDb: null }],
  ])("%#", (rule, outsideDb, ownTargetDb, need) => {
    expect(attenuationNeed(outsideDb, rule, ownTargetDb)).toEqual(need);
  });

  test("null where neither rule nor worker has a target", () => {
    const none = { adequacy: "not-stated", targetDb: null } as const;
    expect(attenuationNeed(100, none, null)).toBeNull();
    expect(attenuationNeed(100, none, 80)).toEqual({ needDb: 20, targetDb: 80, mostDb: null });
  });
});
