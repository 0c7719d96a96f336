import { describe, expect, test } from "vitest";
import { evaluateDay } from "../../shared/acoustics/day";
import { dosePct, twaDb } from "../../shared/acoustics/dose";
import { lexWeeklyDb } from "../../shared/acoustics/exposure";
import { outsideCriterion } from "../../shared/acoustics/outside-criterion";
import { activeAttenuationDb } from "../../shared/acoustics/protection/active";
import { effectiveAttenuationDb } from "../../shared/acoustics/protection/wearing-time";
import type {
  CriterionResult,
  DayEvaluation,
  DayInput,
  MeterSettings,
  OctaveBandValues,
} from "../../shared/acoustics/types";
import {
  buildDay,
  buildLevel,
  buildProtection,
  buildProtector,
  buildReading,
  buildShift,
  buildTask,
  dayOf,
  lavg5,
  ruleSet,
  STEADY,
  settings,
} from "./build-day";
import "../setup/printed";

/**
 * Facts of the trade that no table of values shows. Numbers are computed by the named formula unless a document is
 * named; no number is called published here.
 */

const US = ruleSet("us-general-industry");
const MSHA = ruleSet("us-mining");
const NIOSH = ruleSet("niosh-rel");
const EU = ruleSet("eu-2003-10-ec");
const UK = ruleSet("uk-2005");
const AUSTRALIA = ruleSet("australia");

function resultOf(
  evaluation: DayEvaluation,
  ruleSetKey: string,
  criterionId: string,
): CriterionResult {
  const result = evaluation.criteria.find(
    (one) => one.ruleSetKey === ruleSetKey && one.criterionId === criterionId,
  );
  if (!result) throw new Error(`No result for ${ruleSetKey} ${criterionId}`);
  return result;
}

const steady = (levelDb: number, fields = {}) => buildLevel(levelDb, { metric: STEADY, ...fields });
const snr25 = buildProtection({ snrDb: 25 });
const flatNoise = { lcMinusLaDb: 0 };

describe("action values ignore protectors, a limit may count them", () => {
  const day = dayOf(
    buildTask("press", 480, buildLevel(95, flatNoise), { protection: snr25, wornPct: 100 }),
  );
  const evaluation = evaluateDay(day, EU, [AUSTRALIA]);

  test("EU: both levels are kept, each judged by its own criteria", () => {
    expect(evaluation.outsideDb).toBeCloseTo(95, 9);
    expect(evaluation.atEarDb).toBeCloseTo(70, 9);
    expect(resultOf(evaluation, "eu-2003-10-ec", "upper-action-worn").verdict).toBe("over");
    expect(resultOf(evaluation, "eu-2003-10-ec", "limit")).toMatchObject({
      verdict: "under",
      judged: "at-the-ear",
    });
  });

  test("Australia's limit does not count the protector", () => {
    expect(resultOf(evaluation, "australia", "limit")).toMatchObject({ verdict: "over" });
  });
});

describe("the comparator belongs to the criterion, even to the duty", () => {
  test.each([
    [80, "lower-action-offer", "under"],
    [80, "lower-action-training", "over"],
    [80.001, "lower-action-offer", "over"],
    [85, "upper-action-worn", "over"],
    [85, "upper-action-programme", "under"],
    [84.96, "upper-action-worn", "under"],
    [87, "limit", "under"],
    [87.001, "limit", "over"],
  ])("EU: 8 h at %d dB, %s: %s", (levelDb, id, verdict) => {
    const evaluation = evaluateDay(dayOf(buildTask("press", 480, buildLevel(levelDb))), EU, []);
    expect(resultOf(evaluation, "eu-2003-10-ec", id).verdict).toBe(verdict);
  });

  test.each([
    [85, "action-value", "over"],
    [84.99, "action-value", "under"],
    [90, "limit", "under"],
    [90.01, "limit", "over"],
  ])("US: 8 h steady at %d dB(A), %s: %s", (levelDb, id, verdict) => {
    const evaluation = evaluateDay(dayOf(buildTask("press", 480, steady(levelDb))), US, []);
    expect(resultOf(evaluation, US.key, id).verdict).toBe(verdict);
  });

  test("the same day cut into uneven parts still does not break 87.0", () => {
    const minutes = [7, 11, 13, 449];
    const tasks = minutes.map((min, index) => buildTask(`part-${index}`, min, buildLevel(87)));
    expect(resultOf(evaluateDay(dayOf(...tasks), EU, []), EU.key, "limit").verdict).toBe("under");
  });
});

test("a day of exactly 85 in parts reaches 100 % of the NIOSH limit, whatever binary fractions make of it", () => {
  const parts = [1, 479].map((min) => buildTask(`part-${min}`, min, steady(85)));
  expect(resultOf(evaluateDay(dayOf(...parts), NIOSH, []), NIOSH.key, "limit").verdict).toBe(
    "over",
  );
});

describe("two US doses from the same noise", () => {
  test("8 h at 89.9 dB(A): 98.6 % from 80 dB, nothing from 90 dB", () => {
    const evaluation = evaluateDay(dayOf(buildTask("press", 480, steady(89.9))), US, []);
    expect(resultOf(evaluation, US.key, "action-value").dosePct).toAgreeWithPrinted("98.6");
    expect(resultOf(evaluation, US.key, "limit")).toMatchObject({
      dosePct: 0,
      levelDb: null,
      verdict: "under",
      reason: "below-threshold",
    });
  });

  test("a level equal to the threshold counts", () => {
    const evaluation = evaluateDay(dayOf(buildTask("press", 480, steady(80))), US, []);
    expect(resultOf(evaluation, US.key, "action-value").dosePct).toBe(25);
  });
});

describe("the whole day counts, the reference stays 8 h", () => {
  test("12 h at 90 dB(A) is 150 %, and LEX 91.8", () => {
    const day = dayOf(buildTask("press", 720, steady(90)));
    const evaluation = evaluateDay(day, US, [EU]);
    expect(resultOf(evaluation, US.key, "limit").dosePct).toBe(150);
    expect(resultOf(evaluation, EU.key, "limit").levelDb).toAgreeWithPrinted("91.8");
  });
});

describe("the ceiling is a verdict of its own and still adds to the dose", () => {
  const day = dayOf(buildTask("test cell", 1, steady(116)), buildTask("office", 479, steady(60)));
  const evaluation = evaluateDay(day, US, [MSHA]);

  test("one minute at 116 dB(A): over 115, dose 100/480·2^5.2", () => {
    expect(resultOf(evaluation, US.key, "ceiling")).toMatchObject({
      levelDb: 116,
      verdict: "over",
    });
    expect(resultOf(evaluation, US.key, "limit").dosePct).toAgreeWithPrinted("7.66");
    expect(resultOf(evaluation, US.key, "limit").verdict).toBe("under");
  });

  test("mining ignores protectors for it", () => {
    const muffs = buildProtection({ usRatingDb: 30 });
    const worn = dayOf(buildTask("drill", 480, steady(116), { protection: muffs, wornPct: 100 }));
    expect(resultOf(evaluateDay(worn, MSHA, []), MSHA.key, "ceiling").verdict).toBe("over");
  });

  test("115 itself does not break it", () => {
    const atCeiling = dayOf(buildTask("drill", 480, steady(115)));
    expect(resultOf(evaluateDay(atCeiling, US, []), US.key, "ceiling").verdict).toBe("under");
  });

  test("a mean above it proves it; a mean below proves nothing", () => {
    const loud = dayOf(buildTask("drill", 480, buildLevel(116)));
    expect(resultOf(evaluateDay(loud, US, []), US.key, "ceiling")).toMatchObject({
      verdict: "over",
      bound: "lower",
    });
    const mean = dayOf(buildTask("drill", 480, buildLevel(100)));
    expect(resultOf(evaluateDay(mean, US, []), US.key, "ceiling")).toMatchObject({
      verdict: "not-assessed",
      reason: "no-slow-maximum",
    });
  });

  test("the 140 dB peak is a should in the US text", () => {
    expect(US.criteria.find(({ id }) => id === "peak")).toMatchObject({
      force: "should",
      peakWeighting: null,
    });
  });
});

test("a dose of zero has no TWA: below threshold, neither −∞ nor 0 dB", () => {
  expect(twaDb(0, { criterionLevelDb: 90, exchangeRateDb: 5, twaFactor: 16.61 })).toBeNull();
  const evaluation = evaluateDay(dayOf(buildTask("office", 480, steady(70))), US, []);
  expect(evaluation.outsideDb).toBeNull();
  expect(resultOf(evaluation, US.key, "action-value").reason).toBe("below-threshold");
});

test("nothing to add up is not a dose of zero", () => {
  expect(() =>
    dosePct([], { criterionLevelDb: 90, exchangeRateDb: 5, thresholdDb: 90, referenceMin: 480 }),
  ).toThrow(RangeError);
  const empty = evaluateDay(buildDay([buildShift(480, [])]), US, [EU]);
  expect(empty.criteria.every(({ verdict }) => verdict === "not-assessed")).toBe(true);
  expect(new Set(empty.criteria.map(({ reason }) => reason))).toEqual(new Set(["no-tasks"]));
});

test("a peak under another weighting is not assessed; a rule that names none takes any", () => {
  const peak = { levelDb: 139, weighting: "Z" } as const;
  const day = dayOf(buildTask("press", 480, buildLevel(80, { peak })));
  const evaluation = evaluateDay(day, US, [AUSTRALIA]);
  expect(resultOf(evaluation, AUSTRALIA.key, "limit-peak")).toMatchObject({
    verdict: "not-assessed",
    reason: "peak-weighting",
  });
  expect(resultOf(evaluation, US.key, "peak").verdict).toBe("under");
});

describe("order and place of deratings", () => {
  test("UK: the 4 dB are taken once, and not off a worker's own fit", () => {
    const onLabel = evaluateDay(
      dayOf(
        buildTask("press", 480, buildLevel(95, flatNoise), { protection: snr25, wornPct: 100 }),
      ),
      UK,
      [],
    );
    expect(onLabel.atEarDb).toBeCloseTo(95 - 25 + 4, 9);
    const own = buildProtection({ snrDb: 25 }, { ownFitDb: 21 });
    const onFit = evaluateDay(
      dayOf(buildTask("press", 480, buildLevel(95, flatNoise), { protection: own, wornPct: 100 })),
      UK,
      [],
    );
    expect(onFit.atEarDb).toBeCloseTo(95 - 21, 9);
    expect(onFit.tasks[0]?.governingMethod).toBe("own-fit");
  });

  test("US: own fit only lowers, and the undiscounted rating − 7 stays beside it", () => {
    const atEarWith = (ownFitDb: number) =>
      evaluateDay(
        dayOf(
          buildTask("press", 480, buildLevel(100), {
            protection: buildProtection({ usRatingDb: 29 }, { ownFitDb }),
            wornPct: 100,
          }),
        ),
        US,
        [],
      );
    expect(atEarWith(30).atEarDb).toBeCloseTo(78, 9);
    expect(atEarWith(12).atEarDb).toBeCloseTo(88, 9);
    expect(atEarWith(12).tasks[0]?.methods).toContainEqual({
      method: "us-single-number",
      atEarDb: 78,
      wasClamped: false,
      reason: null,
    });
  });

  test("NIOSH: a rating of 20 on a premoulded plug would be −1 dB: clamped, and said", () => {
    const plug = buildProtection({ kind: "premoulded-plug", usRatingDb: 20 });
    const day = dayOf(buildTask("press", 480, buildLevel(95), { protection: plug, wornPct: 100 }));
    const [task] = evaluateDay(day, NIOSH, []).tasks;
    expect(task?.methods).toEqual([
      { method: "us-single-number", atEarDb: 95, wasClamped: true, reason: null },
    ]);
  });
});

describe("wearing time", () => {
  test("30 dB worn 95 % are 12.9 at 3 dB and 19.7 at 5 dB", () => {
    expect(effectiveAttenuationDb(30, 95, 10)).toAgreeWithPrinted("12.9");
    expect(effectiveAttenuationDb(30, 95, 5 / Math.log10(2))).toAgreeWithPrinted("19.7");
  });

  test.each([
    ["spread", 90, 90, "87.1"],
    ["all of it in the loud task", 80, 100, "90.1"],
  ])(
    "4 h at 100 and 4 h at 75 dB, 25 dB worn 90 %%: removal %s",
    (_how, loudPct, quietPct, printed) => {
      const worn = (id: string, levelDb: number, wornPct: number) =>
        buildTask(id, 240, buildLevel(levelDb, flatNoise), {
          protection: snr25,
          wornPct,
          zone: "single",
        });
      const day = dayOf(worn("loud", 100, loudPct), worn("quiet", 75, quietPct));
      expect(evaluateDay(day, EU, []).atEarDb).toAgreeWithPrinted(printed);
    },
  );

  test("not known: the level if worn all the time, and no verdict", () => {
    const day = dayOf(buildTask("press", 480, buildLevel(105, flatNoise), { protection: snr25 }));
    const evaluation = evaluateDay(day, EU, []);
    expect(evaluation.atEarDb).toBeCloseTo(80, 9);
    expect(resultOf(evaluation, EU.key, "limit")).toMatchObject({
      verdict: "not-assessed",
      reason: "wearing-unknown",
      bound: "lower",
    });
    expect(evaluation.tasks[0]).toMatchObject({
      inTaskDb: null,
      reason: "wearing-unknown",
      word: "good",
    });
  });

  test("not known, but over even if worn all the time, or under without it", () => {
    const judgeAt = (levelDb: number) => {
      const task = buildTask("press", 480, buildLevel(levelDb, flatNoise), { protection: snr25 });
      return resultOf(evaluateDay(dayOf(task), EU, []), EU.key, "limit");
    };
    expect(judgeAt(113)).toMatchObject({ verdict: "over", bound: "lower" });
    expect(judgeAt(86)).toMatchObject({ verdict: "under", bound: "upper" });
  });

  test("Appendix B: 8 h at 100 dB(A) with a rating of 29 is 78 at the ear, not a dose of 0", () => {
    const muff = buildProtection({ usRatingDb: 29 });
    for (const metric of [STEADY, lavg5(80)]) {
      const task = buildTask("press", 480, buildLevel(100, { metric }), {
        protection: muff,
        wornPct: 100,
      });
      const evaluation = evaluateDay(dayOf(task), US, []);
      expect(evaluation.atEarDb).toBeCloseTo(78, 9);
      expect(evaluation).toMatchObject({ atEarBound: "exact", word: "enough" });
    }
  });

  // An average from 90 dB hides up to a steady 90 dB from one from 80 dB: by hand, 16.61·lg(2^(L/5) + 2^18) is 101.61
  // for 100 dB, so that the ear has 78 to 79.61 under a rating of 29, and 88.00 to 89.61, 95.00 to 96.61 under 19 and 12.
  test.each([
    [29, null, 79.61, "upper", "enough", null],
    [19, null, 89.61, "upper", "enough", null],
    [19, 85, 88, "lower", "too-little", null],
    [18.5, null, 90.11, "upper", null, "only-upper-bound"],
    [12, null, 95, "lower", "too-little", null],
  ] as const)(
    "Appendix B: an LAVG from 90 dB is a lower bound, rating %d, own target %s: %d as %s bound, %s",
    (usRatingDb, personalTargetDb, levelDb, atEarBound, word, protectorReason) => {
      const task = buildTask("press", 480, buildLevel(100, { metric: lavg5(90) }), {
        protection: buildProtection({ usRatingDb }),
        wornPct: 100,
      });
      const evaluation = evaluateDay({ ...dayOf(task), personalTargetDb }, US, []);
      expect(evaluation.atEarDb).toBeCloseTo(levelDb, 2);
      expect(evaluation).toMatchObject({ atEarBound, word, protectorReason });
    },
  );

  test("EN 458: an LAVG proves Too little by energy and no other word", () => {
    const wordAt = (averageDb: number) =>
      evaluateDay(
        dayOf(
          buildTask("press", 480, buildLevel(averageDb, { ...flatNoise, metric: lavg5(null) }), {
            protection: snr25,
            wornPct: 100,
          }),
        ),
        EU,
        [],
      );
    expect(wordAt(112)).toMatchObject({ word: "too-little", atEarBound: "lower" });
    expect(wordAt(95)).toMatchObject({ word: null, protectorReason: "only-lower-bound" });
  });

  test("Appendix B with a governing reading: its TWA less the rating − 7", () => {
    const muff = buildProtection({ usRatingDb: 29 });
    const task = buildTask("press", 480, steady(94), { protection: muff, wornPct: 100 });
    const reading = buildReading(settings(5, 80), { averageDb: 98 });
    const evaluation = evaluateDay(
      buildDay([buildShift(480, [task], { readings: [reading] })]),
      US,
      [],
    );
    expect(evaluation.atEarDb).toBeCloseTo(76, 9);
    expect(evaluation.tasksDb).toAgreeWithPrinted("94.0");
    expect(evaluation.readingGapDb).toAgreeWithPrinted("4.0");
  });

  test("a worker with a stricter requirement is judged by 85", () => {
    const muff = buildProtection({ usRatingDb: 19 });
    const task = buildTask("press", 480, steady(100), { protection: muff, wornPct: 100 });
    expect(evaluateDay(dayOf(task), US, []).word).toBe("enough"); // 88
    const strict: DayInput = { ...dayOf(task), personalTargetDb: 85 };
    expect(evaluateDay(strict, US, []).word).toBe("too-little");
  });
});

test("seven days at 85 dB are a week of 86.46", () => {
  expect(lexWeeklyDb([85, 85, 85, 85, 85, 85, 85])).toAgreeWithPrinted("86.46");
});

describe("uncertainty", () => {
  const sampled = (levelDb: number, samplesDb: number[]) =>
    buildLevel(levelDb, { samplesDb, instrument: "class-1-meter" });
  const evaluate = (day: DayInput) =>
    evaluateDay({ ...day, site: { ...day.site, usesUncertainty: true } }, EU, [US]);

  test("a single sample has no u1a, and no uncertainty comes of it", () => {
    const evaluation = evaluate(dayOf(buildTask("press", 480, sampled(86, [86]))));
    expect(evaluation).toMatchObject({ uncertaintyDb: null, uncertaintyReason: "too-few-samples" });
  });

  test("exceeds 87 at 86.5: can't tell yet; over at 88 but not clearly; clearly at 95", () => {
    const at = (levelDb: number) =>
      resultOf(
        evaluate(dayOf(buildTask("press", 480, sampled(levelDb, [levelDb, levelDb, levelDb])))),
        EU.key,
        "limit",
      );
    // No scatter: U = 1.65·√(0.7² + 1²) = 2.014.
    expect(at(86.5)).toMatchObject({ verdict: "cant-tell-yet", reason: "within-uncertainty" });
    expect(at(86.5).uncertaintyDb).toAgreeWithPrinted("2.014");
    expect(at(84.9).verdict).toBe("under");
    expect(at(88)).toMatchObject({ verdict: "over", isClear: false });
    expect(at(95)).toMatchObject({ verdict: "over", isClear: true });
  });

  test("it belongs to LEX and is never put on a 5 dB dose", () => {
    const day = dayOf(
      buildTask("press", 480, steady(89, { samplesDb: [89, 89, 90], instrument: "dosimeter" })),
    );
    const evaluation = evaluate(day);
    expect(evaluation.uncertaintyDb).not.toBeNull();
    expect(resultOf(evaluation, US.key, "limit").uncertaintyDb).toBeNull();
  });

  test("a governing reading of one day carries instrument and position only", () => {
    const laeq: MeterSettings = { ...settings(3, null), criterionLevelDb: 85 };
    const shift = buildShift(480, [], { readings: [buildReading(laeq, { averageDb: 86 })] });
    const evaluation = evaluate(buildDay([shift]));
    expect(evaluation.uncertaintyDb).toAgreeWithPrinted("2.97");
    expect(resultOf(evaluation, EU.key, "upper-action-worn")).toMatchObject({
      basis: "reading",
      verdict: "over",
    });
  });
});

describe("active parts", () => {
  const spectrum: OctaveBandValues = [105, 104, 100, 92, 85, 80, 75, 70];
  const muff = buildProtector({
    kind: "active-earmuff",
    bands: {
      meanDb: [12, 14, 18, 25, 30, 34, 36, 36],
      sdDb: [2, 2, 2, 2, 2, 2, 2, 2],
    },
    active: {
      attenuationDb: [14, 15, 12, 6, -1, -2, 0, 0],
      delayS: null,
      gain: null,
      maximumDb: null,
      bandwidthHz: null,
      saturatesAboveDb: 110,
      batteryMin: 240,
    },
  });
  const worn = (levelDb: number, fields = {}) =>
    buildTask("run-up", 480, buildLevel(levelDb, { octaveBandsDb: spectrum }), {
      protection: buildProtection({}, { inner: muff, ...fields }),
      wornPct: 100,
    });

  test("given on, off and as worked; the limit is judged with the part off", () => {
    const evaluation = evaluateDay(dayOf(worn(95)), EU, []);
    const { atEarDb, atEarActiveDb, atEarAsWorkedDb } = evaluation;
    expect(atEarActiveDb!).toBeLessThan(atEarDb! - 5);
    // Half the day on, half off, by energy.
    const mixDb = 10 * Math.log10((10 ** (atEarDb! / 10) + 10 ** (atEarActiveDb! / 10)) / 2);
    expect(atEarAsWorkedDb).toBeCloseTo(mixDb, 9);
    expect(resultOf(evaluation, EU.key, "limit").levelDb).toBeCloseTo(atEarDb!, 9);
  });

  test("credit needs the site's policy and a passed check", () => {
    const judged = (creditsActivePart: boolean, activeCheckPassed: boolean) => {
      const day = dayOf(worn(95, { activeCheckPassed }));
      const site = { ...day.site, creditsActivePart };
      const evaluation = evaluateDay({ ...day, site }, EU, []);
      return resultOf(evaluation, EU.key, "limit").levelDb! - evaluation.atEarDb!;
    };
    expect(judged(true, false)).toBeCloseTo(0, 9);
    expect(judged(false, true)).toBeCloseTo(0, 9);
    expect(judged(true, true)).toBeLessThan(-2);
  });

  test("saturates above the stated outside level", () => {
    const [task] = evaluateDay(dayOf(worn(111)), EU, []).tasks;
    expect(task?.wornActiveDb).toBe(task?.wornDb);
    expect(task?.reason).toBe("saturated");
  });

  test("may add noise where the noise is high", () => {
    const hiss: OctaveBandValues = [60, 60, 65, 75, 92, 95, 88, 80];
    const level = buildLevel(97, { octaveBandsDb: hiss });
    const task = buildTask("jets", 480, level, {
      protection: buildProtection({}, { inner: muff }),
      wornPct: 100,
    });
    const [seen] = evaluateDay(dayOf(task), EU, []).tasks;
    expect(seen!.wornActiveDb!).toBeGreaterThan(seen!.wornDb!);
  });

  test("no credit past the first break-even", () => {
    const late = activeAttenuationDb({
      attenuationDb: null,
      delayS: 250e-6,
      gain: 1,
      maximumDb: null,
      bandwidthHz: null,
      saturatesAboveDb: null,
      batteryMin: null,
    });
    expect(late?.[6]).toBeLessThanOrEqual(0);
  });
});

describe("a level carries its metric", () => {
  test("105 dB for a tenth of 8 h, 70 dB for the rest: 200 % by LAeq, 80 % in truth", () => {
    const known = dayOf(buildTask("burst", 48, steady(105)), buildTask("rest", 432, steady(70)));
    const exact = evaluateDay(known, US, [EU]);
    expect(resultOf(exact, EU.key, "limit").levelDb).toAgreeWithPrinted("95.0");
    expect(resultOf(exact, US.key, "limit")).toMatchObject({ dosePct: 80, verdict: "under" });

    const byMean = evaluateDay(dayOf(buildTask("both", 480, buildLevel(95))), US, []);
    expect(resultOf(byMean, US.key, "limit")).toMatchObject({
      dosePct: 200,
      bound: "upper",
      verdict: "cant-tell-yet",
      reason: "only-upper-bound",
    });
    expect(byMean.missingReadings).toContain("limit");
  });

  test("an upper estimate proves Under", () => {
    const evaluation = evaluateDay(dayOf(buildTask("both", 480, buildLevel(84.5))), US, []);
    expect(resultOf(evaluation, US.key, "action-value")).toMatchObject({
      verdict: "under",
      bound: "upper",
    });
    expect(evaluation.missingReadings).not.toContain("action-value");
  });

  test.each([
    [88, "over"],
    [86, "cant-tell-yet"],
  ])("an LAVG of %d dB at 5 dB under a limit of 87 by energy: %s", (levelDb, verdict) => {
    const task = buildTask("both", 480, buildLevel(levelDb, { metric: lavg5(80) }));
    expect(resultOf(evaluateDay(dayOf(task), EU, []), EU.key, "limit")).toMatchObject({
      verdict,
      bound: "lower",
    });
  });

  test("an average under the criterion's own settings serves it exactly, threshold and all", () => {
    const task = buildTask("both", 480, buildLevel(88, { metric: lavg5(90) }));
    const evaluation = evaluateDay(dayOf(task), US, []);
    expect(resultOf(evaluation, US.key, "limit")).toMatchObject({
      bound: "exact",
      verdict: "under",
    });
    expect(resultOf(evaluation, US.key, "limit").dosePct).toAgreeWithPrinted("75.8"); // 2^(−2/5)
  });

  test("a C-weighted average says nothing about an A-weighted one", () => {
    const metric = { kind: "lavg", settings: { ...settings(3, null), weighting: "C" } } as const;
    const task = buildTask("both", 480, buildLevel(95, { metric }));
    expect(resultOf(evaluateDay(dayOf(task), EU, []), EU.key, "limit").verdict).toBe(
      "cant-tell-yet",
    );
  });
});

describe("the day adds all shifts", () => {
  const shift = (id: string) => buildShift(480, [buildTask(id, 480, buildLevel(83))], { id });

  test("8 h at 83 dB twice is LEX 86.0", () => {
    const evaluation = evaluateDay(buildDay([shift("early"), shift("late")]), EU, []);
    expect(evaluation.outsideDb).toAgreeWithPrinted("86.0");
    expect(evaluation.shiftMin).toBe(960);
  });

  test("one shift by reading, the other by tasks", () => {
    const laeq: MeterSettings = { ...settings(3, null), criterionLevelDb: 85 };
    const read = buildShift(480, [], { readings: [buildReading(laeq, { averageDb: 83 })] });
    const evaluation = evaluateDay(buildDay([read, shift("late")]), EU, []);
    expect(evaluation.outsideDb).toAgreeWithPrinted("86.0");
    expect(resultOf(evaluation, EU.key, "upper-action-worn").basis).toBe("tasks");
  });
});

describe("readings", () => {
  const tasks = [buildTask("press", 480, steady(91))];
  const evaluateWith = (fields: Parameters<typeof buildReading>[1], thresholdDb = 90) =>
    evaluateDay(
      buildDay([
        buildShift(480, tasks, { readings: [buildReading(settings(5, thresholdDb), fields)] }),
      ]),
      US,
      [],
    );

  test("under the criterion's own settings over the shift governs", () => {
    const result = resultOf(evaluateWith({ dosePct: 62 }), US.key, "limit");
    expect(result.dosePct).toBeCloseTo(62, 9);
    expect(result).toMatchObject({
      basis: "reading",
      verdict: "under",
      bound: "exact",
    });
  });

  test("under another threshold it does not govern", () => {
    const result = resultOf(evaluateWith({ dosePct: 62 }, 80), US.key, "limit");
    expect(result).toMatchObject({ basis: "tasks", verdict: "over" });
  });

  test("a part is only evidence; projected it stands for the shift, and is marked", () => {
    expect(
      resultOf(evaluateWith({ dosePct: 31, durationMin: 240, covers: "part" }), US.key, "limit")
        .basis,
    ).toBe("tasks");
    const evaluation = evaluateWith({ dosePct: 31, durationMin: 240, covers: "projected" });
    expect(resultOf(evaluation, US.key, "limit").dosePct).toBeCloseTo(62, 9);
    expect(resultOf(evaluation, US.key, "limit").basis).toBe("projected-reading");
  });

  test("a dose under another criterion level is the same noise: 25 % at 90 is 50 % at 85", () => {
    const fields = { dosePct: 25, settings: { ...settings(5, 90), criterionLevelDb: 95 } };
    expect(resultOf(evaluateWith(fields), US.key, "limit").dosePct).toBeCloseTo(50, 9);
  });

  test("a reading of zero is below the threshold", () => {
    expect(resultOf(evaluateWith({ dosePct: 0 }), US.key, "limit")).toMatchObject({
      dosePct: 0,
      reason: "below-threshold",
    });
  });

  test("kept in spite of a failed field check: the officer's reason goes with the result", () => {
    expect(evaluateWith({ dosePct: 62, keptReason: "calibrator was cold" }).keptReasons).toEqual([
      "calibrator was cold",
    ]);
  });
});

describe("time not accounted for", () => {
  const known = (levelDb: number) => [buildTask("press", 360, buildLevel(levelDb))];
  const evaluate = (levelDb: number, unaccounted: Parameters<typeof buildShift>[2] & object) =>
    evaluateDay(buildDay([buildShift(480, known(levelDb), unaccounted)]), EU, []);

  test("unknown is not assessed, and shows no level", () => {
    const evaluation = evaluate(78, { unaccounted: { how: "unknown" } });
    expect(evaluation.criteria[0]).toMatchObject({
      verdict: "not-assessed",
      reason: "time-unknown",
      levelDb: null,
    });
    expect(evaluation).toMatchObject({ outsideDb: null, unaccountedMin: 120, accountedMin: 360 });
  });

  test("unless what is known is already over", () => {
    const evaluation = evaluate(95, { unaccounted: { how: "unknown" } });
    expect(evaluation.criteria[0]).toMatchObject({ verdict: "over", bound: "lower" });
  });

  test("like the rest: the same level over the shift", () => {
    expect(evaluate(84, { unaccounted: { how: "like-the-rest" } }).outsideDb).toBeCloseTo(84, 9);
  });

  test("quiet, with its level", () => {
    // 10 lg (360/480·10^8.4 + 120/480·10^6.5)
    expect(
      evaluate(84, { unaccounted: { how: "quiet", levelDb: 65 } }).outsideDb,
    ).toAgreeWithPrinted("82.77");
  });

  test("a task without a level is not silence", () => {
    const evaluation = evaluateDay(dayOf(buildTask("press", 480, null)), EU, []);
    expect(evaluation.criteria[0]).toMatchObject({
      verdict: "not-assessed",
      reason: "level-missing",
    });
  });
});

describe("EN 458 is for the time worn, per task", () => {
  test("one hour at 75 dB at the ear is LEX 66 and no overprotection", () => {
    const task = buildTask("press", 60, buildLevel(100, flatNoise), {
      protection: snr25,
      wornPct: 100,
    });
    const evaluation = evaluateDay(
      buildDay([buildShift(480, [task], { unaccounted: { how: "quiet", levelDb: 40 } })]),
      EU,
      [],
    );
    expect(evaluation.atEarDb).toAgreeWithPrinted("66.0");
    expect(evaluation.tasks[0]?.word).toBe("good");
    expect(evaluation.word).toBe("good");
  });

  test("the worst task is the day's: too little before too much", () => {
    const worn = (id: string, levelDb: number) =>
      buildTask(id, 160, buildLevel(levelDb, flatNoise), { protection: snr25, wornPct: 100 });
    const both = evaluateDay(
      dayOf(worn("quiet", 90), worn("loud", 112), worn("fair", 102)),
      EU,
      [],
    );
    expect(both).toMatchObject({ word: "too-little", decidingTaskId: "loud" });
    const quiet = evaluateDay(dayOf(worn("quiet", 90), worn("fair", 102)), EU, []);
    expect(quiet).toMatchObject({ word: "too-much", decidingTaskId: "quiet" });
  });

  test("below the wear-from level a protector counts as not worn, unless in a zone", () => {
    const task = (zone: "none" | "single") =>
      buildTask("stores", 480, buildLevel(80, flatNoise), {
        protection: snr25,
        wornPct: 100,
        zone,
      });
    expect(evaluateDay(dayOf(task("none")), EU, []).atEarDb).toBeCloseTo(80, 9);
    expect(evaluateDay(dayOf(task("single")), EU, []).atEarDb).toBeCloseTo(55, 9);
  });
});

describe("methods and what they need", () => {
  const hml = buildProtection({ hDb: 30, mDb: 24, lDb: 16, snrDb: 26 });
  const at = (lcMinusLaDb: number | null) => {
    const task = buildTask("press", 480, buildLevel(100, { lcMinusLaDb }), {
      protection: hml,
      wornPct: 100,
    });
    return evaluateDay(dayOf(task), EU, []);
  };

  test("HML holds from −2 to 10; outside, the next method governs", () => {
    expect(at(6).tasks[0]).toMatchObject({ governingMethod: "hml", wornDb: 80 });
    expect(at(10.5).tasks[0]).toMatchObject({ governingMethod: "snr", wornDb: 84.5 });
    expect(at(10.5).tasks[0]?.methods[0]).toMatchObject({
      method: "hml",
      atEarDb: null,
      reason: "lc-la-out-of-range",
    });
  });

  test("without a C-weighted level neither is assessed, and the ear is not known", () => {
    const evaluation = at(null);
    expect(evaluation.atEarDb).toBeNull();
    expect(evaluation.tasks[0]).toMatchObject({ wornDb: null, reason: "no-c-weighted-level" });
    expect(resultOf(evaluation, EU.key, "limit")).toMatchObject({
      verdict: "not-assessed",
      reason: "no-c-weighted-level",
    });
  });

  test("two together: +5 dB is the US rule only", () => {
    const pair = buildProtection(
      { usRatingDb: 29, snrDb: 30 },
      { outer: buildProtector({ modelId: "outer", usRatingDb: 25, snrDb: 28 }) },
    );
    const day = dayOf(
      buildTask("press", 480, buildLevel(110, { metric: STEADY }), {
        protection: pair,
        wornPct: 100,
      }),
    );
    expect(evaluateDay(day, US, []).atEarDb).toBeCloseTo(83, 9);
    const eu = evaluateDay(day, EU, []);
    expect(eu.tasks[0]).toMatchObject({ wornDb: null, reason: "combination-not-tested" });
  });

  test("where the rule names no method, the levels stand beside and none governs", () => {
    const muff = buildProtection({ usRatingDb: 29 });
    const day = dayOf(buildTask("drill", 480, steady(100), { protection: muff, wornPct: 100 }));
    const evaluation = evaluateDay(day, MSHA, []);
    expect(evaluation.tasks[0]).toMatchObject({ governingMethod: null, reason: "not-stated" });
    expect(evaluation.tasks[0]?.methods).toHaveLength(1);
    expect(evaluation).toMatchObject({ atEarDb: null, word: null, protectorReason: "not-stated" });
  });
});

describe("peaks at the ear", () => {
  const evaluatePeak = (levelDb: number, protection = snr25 as typeof snr25 | null) => {
    const level = buildLevel(95, { ...flatNoise, peak: { levelDb, weighting: "C" } });
    const task = buildTask("press", 480, level, { protection, wornPct: 100 });
    return resultOf(evaluateDay(dayOf(task), EU, []), EU.key, "limit-peak");
  };

  test("under a protector not assessed, but under the limit without it is under", () => {
    expect(evaluatePeak(142)).toMatchObject({
      verdict: "not-assessed",
      reason: "peak-at-ear-not-assessed",
    });
    expect(evaluatePeak(139)).toMatchObject({ verdict: "under", levelDb: 139 });
    expect(evaluatePeak(142, null)).toMatchObject({ verdict: "over", levelDb: 142 });
  });
});

describe("the rule sets", () => {
  test("each has a criterion for the noise without protection", () => {
    expect(outsideCriterion(US).id).toBe("action-value");
    expect(outsideCriterion(EU).levelDb).toBe(80);
    expect(outsideCriterion(NIOSH).id).toBe("limit");
  });

  test("mining asks for two protectors above 800 %", () => {
    const at = (levelDb: number) =>
      resultOf(
        evaluateDay(dayOf(buildTask("drill", 480, steady(levelDb))), MSHA, []),
        MSHA.key,
        "dual-protection",
      );
    expect(at(105)).toMatchObject({ dosePct: 800, verdict: "under" });
    expect(at(105.1).verdict).toBe("over");
  });

  test("NIOSH: 100 % at 85 reaches", () => {
    const at = (levelDb: number) =>
      resultOf(
        evaluateDay(dayOf(buildTask("press", 480, steady(levelDb))), NIOSH, []),
        NIOSH.key,
        "limit",
      );
    expect(at(85)).toMatchObject({ verdict: "over" });
    expect(at(84.9).verdict).toBe("under");
  });
});
