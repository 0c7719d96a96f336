import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  describeGroup,
  fitBelowThreshold,
  type GroupSample,
  groupBelonging,
  grubbsCritical,
  probabilityPlot,
  workerOutliers,
} from "../../shared/acoustics/group-statistics";
import "../setup/printed";

const at = (levelDb: number, workerId: string | null = null): GroupSample => ({
  workerId,
  levelDb,
  isBelow: false,
});
const below = (levelDb: number, workerId: string | null = null): GroupSample => ({
  workerId,
  levelDb,
  isBelow: true,
});

describe("a group's figures by hand", () => {
  // 84, 85, 86, 87, 88, 90: mean 86.667, squares 7.111 + 2.778 + 0.444 + 0.111 + 1.778 + 11.111 = 23.333, over 5: 4.667.
  const group = describeGroup(
    [84, 85, 86, 87, 88, 90].map((db) => at(db)),
    [90, 85],
  );

  test("mean, standard deviation, mean by energy", () => {
    expect(group.meanDb).toAgreeWithPrinted("86.667");
    expect(group.sdDb).toAgreeWithPrinted("2.160");
    // 10 lg of (2.512 + 3.162 + 3.981 + 5.012 + 6.310 + 10)·10⁸ / 6.
    expect(group.energyMeanDb).toAgreeWithPrinted("87.13");
    expect(group.reasons).toEqual([]);
  });

  test("upper tolerance limit with the printed K of 6, 3.708 (handbook): 86.667 + 3.708 · 2.160", () => {
    expect(group.toleranceFactor).toAgreeWithPrinted("3.708");
    expect(group.toleranceLimitDb).toAgreeWithPrinted("94.68");
  });

  test("exceedance shares from the normal table", () => {
    // (90 − 86.667)/2.160 = 1.543: 6.1 %; (85 − 86.667)/2.160 = −0.772: 78 %.
    expect(group.exceedances[0]!.share).toAgreeWithPrinted("0.061");
    expect(group.exceedances[1]!.share).toAgreeWithPrinted("0.78");
    for (const { share, shareUpTo } of group.exceedances) expect(shareUpTo).toBeGreaterThan(share);
  });

  test("few samples are said to be few, and one has no scatter", () => {
    expect(describeGroup([at(84), at(86), at(85)]).reasons).toEqual(["few-samples"]);
    const one = describeGroup([at(84)], [80]);
    expect(one).toMatchObject({ meanDb: 84, sdDb: null, toleranceLimitDb: null, exceedances: [] });
    expect(one.reasons).toEqual(["few-samples", "too-few-samples"]);
    expect(() => describeGroup([])).toThrow(RangeError);
  });

  test("equal samples have no scatter, and all or none of them is above a level", () => {
    const equal = describeGroup([at(85), at(85), at(85)], [84, 85]);
    expect(equal).toMatchObject({ sdDb: 0, toleranceLimitDb: 85 });
    expect(equal.exceedances.map(({ share }) => share)).toEqual([1, 0]);
  });
});

describe("samples below a threshold", () => {
  /** US EPA guidance QA/G-9, Cohen's method: 24 sulfate results, 3 of them below 1450 (from memory). */
  const SULFATE = [
    1850, 1760, 1710, 1575, 1475, 1780, 1790, 1780, 1790, 1800, 1800, 1840, 1820, 1860, 1780, 1760,
    1800, 1900, 1770, 1790, 1780,
  ];

  test("EPA QA/G-9: mean 1723.66 and deviation 155.3 by the printed table of λ, whose sd has n − 1 inside", () => {
    const { meanDb, sdDb } = fitBelowThreshold([
      ...SULFATE.map((value) => at(value)),
      ...[1, 2, 3].map(() => below(1450)),
    ]);
    // The method's own start: of the 21 values 1771.9 and 8593.69, as printed.
    expect(Math.abs(meanDb - 1723.66)).toBeLessThan(0.5);
    expect(Math.abs(sdDb - 155.3)).toBeLessThan(2);
  });

  /** The same likelihood maximized elsewhere by a general minimizer. */
  test("agrees with a general minimizer, one threshold and several", () => {
    const one = fitBelowThreshold([
      ...SULFATE.map((value) => at(value)),
      ...[1, 2, 3].map(() => below(1450)),
    ]);
    expect(one.meanDb).toBeCloseTo(1723.9951, 3);
    expect(one.sdDb).toBeCloseTo(153.64509, 3);
    const several = fitBelowThreshold([
      ...[86.1, 88.4, 90.2, 84.7, 83.9, 91.5].map((value) => at(value)),
      ...[80, 80, 85, 83].map((value) => below(value)),
    ]);
    expect(several.meanDb).toBeCloseTo(83.718871, 5);
    expect(several.sdDb).toBeCloseTo(5.509025, 5);
  });

  test("a threshold far below the values changes next to nothing but the count", () => {
    const values = [84, 85, 86, 87, 88, 90].map((db) => at(db));
    const without = describeGroup(values);
    const fitted = fitBelowThreshold(values);
    expect(fitted.sdDb * Math.sqrt(6 / 5)).toBeCloseTo(without.sdDb!, 9);
  });

  test("they lower the mean, are said, and are not read as values", () => {
    const values = [84, 85, 86, 87, 88].map((db) => at(db));
    const group = describeGroup([...values, below(80), below(80)]);
    expect(group).toMatchObject({ sampleCount: 7, belowCount: 2 });
    expect(group.reasons).toEqual(["approximate-below-threshold"]);
    expect(group.meanDb!).toBeLessThan(describeGroup(values).meanDb!);
    expect(group.energyMeanDb!).toBeGreaterThan(group.meanDb!);
  });

  test("too little above the thresholds is no fit", () => {
    expect(describeGroup([at(84), at(85), below(80)]).reasons).toContain("too-few-values");
    expect(describeGroup([at(84), at(84), at(84), below(80)]).reasons).toContain("too-few-values");
    const mostly = [at(84), at(85), at(86), ...new Array(13).fill(below(80))];
    expect(describeGroup(mostly).reasons).toEqual(["mostly-below-threshold"]);
  });
});

describe("probability plot", () => {
  test("complete samples lie at rank/(n + 1)", () => {
    const points = probabilityPlot([at(88), at(84), at(86), at(90)]);
    expect(points.map(({ levelDb }) => levelDb)).toEqual([84, 86, 88, 90]);
    for (const [place, { share }] of points.entries())
      expect(share).toBeCloseTo((place + 1) / 5, 12);
    expect(points[0]!.z).toAgreeWithPrinted("-0.842");
  });

  test("two thresholds by hand", () => {
    // At or above 85: 2 of 2 + 3 below it (82, and "below" 85 and 80): 0.4. Of the rest at or above 80: 1 of 2:
    // 0.4 + 0.5 · 0.6 = 0.7. So 82 at 1 − 0.7 + 0.3/2, 87 at 0.6 + 0.4/3, 91 at 0.6 + 0.8/3.
    const points = probabilityPlot([at(91), at(87), at(82), below(85), below(80)]);
    expect(points.map(({ levelDb }) => levelDb)).toEqual([82, 87, 91]);
    expect(points[0]!.share).toBeCloseTo(0.45, 12);
    expect(points[1]!.share).toBeCloseTo(0.6 + 0.4 / 3, 12);
    expect(points[2]!.share).toBeCloseTo(0.6 + 0.8 / 3, 12);
  });

  test("shares rise with the level and stay inside", () => {
    const sample = fc
      .record({ db: fc.integer({ min: 60, max: 110 }), isBelow: fc.boolean() })
      .map(({ db, isBelow }) => (isBelow ? below(db) : at(db)));
    fc.assert(
      fc.property(fc.array(sample, { maxLength: 30 }), (samples) => {
        const points = probabilityPlot(samples);
        expect(points.length).toBe(samples.filter(({ isBelow }) => !isBelow).length);
        for (const [place, { share, levelDb }] of points.entries()) {
          expect(share > 0 && share < 1).toBe(true);
          if (place === 0) continue;
          expect(share).toBeGreaterThan(points[place - 1]!.share);
          expect(levelDb).toBeGreaterThanOrEqual(points[place - 1]!.levelDb);
        }
      }),
    );
  });
});

describe("outliers by worker", () => {
  /** Two-sided 5 %, printed tables of Grubbs' test (from memory). */
  test.each([
    [3, "1.154"],
    [5, "1.715"],
    [8, "2.127"],
    [10, "2.290"],
  ])("critical value of %d: %s", (count, printed) => {
    expect(grubbsCritical(count)).toAgreeWithPrinted(printed);
  });

  /** NIST/SEMATECH e-Handbook 1.3.5.17.1, mass spectrometer (from memory): G = 2.4687, one-sided critical value 2.032. */
  test("NIST's example: the eighth stands apart", () => {
    const values = [199.31, 199.53, 200.19, 200.82, 201.92, 201.95, 202.18, 245.57];
    const { workers, critical } = workerOutliers(
      values.map((value, place) => at(value, `${place}`)),
    );
    expect(workers[0]!.distance).toAgreeWithPrinted("2.4688");
    expect(grubbsCritical(8, 0.1)).toAgreeWithPrinted("2.032");
    expect(critical).toBe(grubbsCritical(8));
    expect(workers.filter(({ isOutlier }) => isOutlier).map(({ workerId }) => workerId)).toEqual([
      "7",
    ]);
  });

  test("works on workers' means, by falling level, and leaves aside who has a sample below a threshold", () => {
    const { workers, leftAsideIds } = workerOutliers([
      at(84, "a"),
      at(86, "a"),
      at(90, "b"),
      at(80, "c"),
      at(88, "d"),
      below(80, "d"),
    ]);
    expect(workers.map(({ workerId, meanDb }) => [workerId, meanDb])).toEqual([
      ["b", 90],
      ["a", 85],
      ["c", 80],
    ]);
    expect(workers.some(({ isOutlier }) => isOutlier)).toBe(false);
    expect(leftAsideIds).toEqual(["d"]);
    expect(workerOutliers([at(84, "a"), at(99, "b")]).critical).toBeNull();
  });
});

describe("do the members belong together", () => {
  /** NIST Statistical Reference Datasets, SiRstv: five instruments, five readings each; certified values (from memory). */
  const SIRSTV = [
    [196.3052, 196.124, 196.189, 196.2569, 196.3403],
    [196.3042, 196.3825, 196.1669, 196.3257, 196.0422],
    [196.1303, 196.2005, 196.2889, 196.0343, 196.1811],
    [196.2795, 196.1748, 196.1494, 196.1485, 195.9885],
    [196.2119, 196.1051, 196.185, 196.0052, 196.209],
  ];
  const samplesOf = (groups: readonly (readonly number[])[]) =>
    groups.flatMap((values, worker) => values.map((value) => at(value, `${worker}`)));

  test("NIST SiRstv: F = 1.18046237440255, residual deviation 0.104076068334656", () => {
    const belonging = groupBelonging(samplesOf(SIRSTV));
    expect(belonging.f!).toBeCloseTo(1.18046237440255, 8);
    expect(belonging.withinDb!).toBeCloseTo(0.104076068334656, 9);
    expect(belonging).toMatchObject({
      degreesBetween: 4,
      degreesWithin: 20,
      verdict: "no-difference-shown",
    });
    expect(belonging.probability!).toBeCloseTo(0.34944749, 7);
  });

  test("unequal numbers by hand", () => {
    // Means 84.433, 87.85, 85.3 of 3, 2 and 4: mean squares 7.2819 and 0.5153; n₀ = (9 − 29/9)/2 = 2.889;
    // between (7.2819 − 0.5153)/2.889 = 2.342.
    const belonging = groupBelonging(
      samplesOf([
        [84.1, 85.3, 83.9],
        [88.2, 87.5],
        [85.0, 86.1, 84.4, 85.7],
      ]),
    );
    expect(belonging.betweenDb! ** 2).toAgreeWithPrinted("2.342");
    expect(belonging.withinDb! ** 2).toAgreeWithPrinted("0.5153");
    // 2.342 of 2.858; 2 · 1.96 · √2.342.
    expect(belonging.betweenShare!).toAgreeWithPrinted("0.820");
    expect(belonging.workerSpanDb!).toAgreeWithPrinted("6.00");
    expect(belonging.f).toAgreeWithPrinted("14.13");
    expect(belonging.verdict).toBe("differ");
  });

  test("what can't be told says why", () => {
    expect(groupBelonging([at(84, "a"), at(85, "a")])).toMatchObject({
      verdict: "cant-tell",
      reason: "one-worker",
    });
    expect(groupBelonging([at(84, "a"), at(85, "b")])).toMatchObject({
      verdict: "cant-tell",
      reason: "no-repeats",
    });
    expect(groupBelonging([at(84, "a"), at(84, "a"), at(85, "b")]).reason).toBe("no-scatter");
  });

  test("workers who are less apart than one's own days have no variance between them, and not a negative one", () => {
    const belonging = groupBelonging(
      samplesOf([
        [80, 90],
        [81, 89],
        [82, 88],
      ]),
    );
    expect(belonging.betweenDb).toBe(0);
    expect(belonging.workerSpanDb).toBe(0);
  });
});
