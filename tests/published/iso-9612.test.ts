import { describe, expect, test } from "vitest";
import {
  COVERAGE_FACTOR,
  INSTRUMENT_DB,
  jobSamplingContributionDb,
  jobSamplingUncertaintyDb,
  minimumGroupMeasuringH,
  POSITION_DB,
  samplingUncertaintyDb,
  taskLevelDb,
  uncertaintyBudget,
} from "../../shared/acoustics/uncertainty";
import "../setup/printed";

describe("ISO 9612:2009, constants (memory)", () => {
  test("Tables C.5 and C.6, and the coverage factor", () => {
    expect(INSTRUMENT_DB).toEqual({ "class-1-meter": 0.7, "class-2-meter": 1.5, dosimeter: 1.5 });
    expect(POSITION_DB).toBe(1.0);
    expect(COVERAGE_FACTOR).toBe(1.65);
  });
});

describe("ISO 9612:2009 Table 1, least total measuring time (memory)", () => {
  test.each([
    [1, 5],
    [5, 5],
    [6, 5.5],
    [10, 7.5],
    [15, 10.0],
    [16, 10.25],
    [18, 10.75],
    [30, 13.75],
    [40, 16.25],
    [41, 17],
  ])("a group of %d needs %d h", (groupSize, hours) => {
    expect(minimumGroupMeasuringH(groupSize)).toBe(hours);
  });
});

/** Columns: u1 in dB. */
const U1 = [0.5, 1.0, 1.5, 2.0, 2.5, 3.0, 3.5, 4.0, 4.5, 5.0, 5.5, 6.0];

/** Exact Land limits, computed elsewhere from the H statistic. */
const EXACT: readonly (readonly [number, readonly string[]])[] = [
  [
    3,
    [
      "0.6",
      "1.5",
      "2.95",
      "5.13",
      "8.02",
      "11.57",
      "15.76",
      "20.6",
      "26.09",
      "32.22",
      "38.99",
      "46.41",
    ],
  ],
  [
    4,
    [
      "0.39",
      "0.89",
      "1.55",
      "2.42",
      "3.56",
      "4.98",
      "6.67",
      "8.64",
      "10.86",
      "13.36",
      "16.11",
      "19.13",
    ],
  ],
  [
    5,
    [
      "0.31",
      "0.68",
      "1.14",
      "1.71",
      "2.42",
      "3.3",
      "4.33",
      "5.54",
      "6.9",
      "8.43",
      "10.12",
      "11.98",
    ],
  ],
  [
    6,
    [
      "0.27",
      "0.57",
      "0.94",
      "1.38",
      "1.92",
      "2.56",
      "3.32",
      "4.19",
      "5.18",
      "6.29",
      "7.52",
      "8.87",
    ],
  ],
  [
    7,
    ["0.24", "0.5", "0.81", "1.18", "1.62", "2.14", "2.75", "3.44", "4.23", "5.11", "6.09", "7.16"],
  ],
  [
    8,
    [
      "0.21",
      "0.45",
      "0.73",
      "1.05",
      "1.43",
      "1.87",
      "2.38",
      "2.96",
      "3.62",
      "4.36",
      "5.18",
      "6.07",
    ],
  ],
  [
    9,
    ["0.2", "0.42", "0.66", "0.95", "1.28", "1.67", "2.12", "2.63", "3.2", "3.84", "4.55", "5.32"],
  ],
  [
    10,
    [
      "0.18",
      "0.39",
      "0.61",
      "0.88",
      "1.18",
      "1.53",
      "1.92",
      "2.38",
      "2.89",
      "3.46",
      "4.08",
      "4.77",
    ],
  ],
  [
    12,
    ["0.16", "0.34", "0.54", "0.77", "1.02", "1.32", "1.65", "2.03", "2.45", "2.92", "3.44", "4.0"],
  ],
  [
    14,
    ["0.15", "0.31", "0.49", "0.69", "0.91", "1.17", "1.46", "1.79", "2.16", "2.56", "3.01", "3.5"],
  ],
  [
    16,
    ["0.14", "0.28", "0.45", "0.63", "0.83", "1.07", "1.33", "1.62", "1.94", "2.3", "2.7", "3.13"],
  ],
  [
    18,
    [
      "0.13",
      "0.27",
      "0.42",
      "0.58",
      "0.77",
      "0.98",
      "1.22",
      "1.48",
      "1.78",
      "2.11",
      "2.46",
      "2.85",
    ],
  ],
  [
    20,
    [
      "0.12",
      "0.25",
      "0.39",
      "0.55",
      "0.72",
      "0.92",
      "1.13",
      "1.38",
      "1.65",
      "1.95",
      "2.28",
      "2.63",
    ],
  ],
  [
    25,
    [
      "0.11",
      "0.22",
      "0.34",
      "0.48",
      "0.63",
      "0.79",
      "0.98",
      "1.19",
      "1.41",
      "1.67",
      "1.94",
      "2.24",
    ],
  ],
  [
    30,
    ["0.1", "0.2", "0.31", "0.43", "0.56", "0.71", "0.87", "1.05", "1.25", "1.48", "1.72", "1.98"],
  ],
];

/** As printed, recalled: within 0.15 dB of the exact limits. */
const RECALLED: readonly (readonly [number, readonly number[]])[] = [
  [3, [0.6, 1.6, 3.1, 5.2, 8.0, 11.5, 15.7, 20.6, 26.1, 32.2, 39.0, 46.5]],
  [4, [0.4, 0.9, 1.6, 2.5, 3.6, 5.0, 6.7, 8.6, 10.9, 13.4, 16.1, 19.2]],
  [5, [0.3, 0.7, 1.2, 1.7, 2.4, 3.3, 4.4, 5.6, 6.9, 8.5, 10.2, 12.1]],
  [6, [0.3, 0.6, 0.9, 1.4, 1.9, 2.6, 3.3, 4.2, 5.2, 6.3, 7.6, 8.9]],
  [7, [0.2, 0.5, 0.8, 1.2, 1.6, 2.2, 2.8, 3.5, 4.3, 5.1, 6.1, 7.2]],
  [8, [0.2, 0.5, 0.7, 1.1, 1.4, 1.9, 2.4, 3.0, 3.6, 4.4, 5.2, 6.1]],
  [9, [0.2, 0.4, 0.7, 1.0, 1.3, 1.7, 2.1, 2.6, 3.2, 3.9, 4.6, 5.4]],
  [10, [0.2, 0.4, 0.6, 0.9, 1.2, 1.5, 1.9, 2.4, 2.9, 3.5, 4.1, 4.8]],
  [12, [0.2, 0.3, 0.5, 0.8, 1.0, 1.3, 1.7, 2.0, 2.5, 2.9, 3.5, 4.0]],
  [14, [0.1, 0.3, 0.5, 0.7, 0.9, 1.2, 1.5, 1.8, 2.2, 2.6, 3.0, 3.5]],
  [16, [0.1, 0.3, 0.5, 0.6, 0.8, 1.1, 1.3, 1.6, 2.0, 2.3, 2.7, 3.2]],
  [18, [0.1, 0.3, 0.4, 0.6, 0.8, 1.0, 1.2, 1.5, 1.8, 2.1, 2.5, 2.9]],
  [20, [0.1, 0.3, 0.4, 0.5, 0.7, 0.9, 1.1, 1.4, 1.7, 2.0, 2.3, 2.6]],
  [25, [0.1, 0.2, 0.3, 0.5, 0.6, 0.8, 1.0, 1.2, 1.4, 1.7, 2.0, 2.3]],
  [30, [0.1, 0.2, 0.3, 0.4, 0.6, 0.7, 0.9, 1.1, 1.3, 1.5, 1.7, 2.0]],
];

describe("ISO 9612:2009 Table C.4", () => {
  test.each(EXACT)("N = %d, exact limits (computed)", (count, cells) => {
    for (const [column, printed] of cells.entries()) {
      // The reference itself is good to a hundredth or two at the far corner.
      const difference = jobSamplingContributionDb(count, U1[column]!) - Number(printed);
      expect(Math.abs(difference)).toBeLessThan(0.011);
    }
  });

  test.each(RECALLED)("N = %d, as printed (memory and verified)", (count, cells) => {
    for (const [column, printed] of cells.entries()) {
      const difference = jobSamplingContributionDb(count, U1[column]!) - printed;
      expect(Math.abs(difference)).toBeLessThanOrEqual(0.2);
    }
  });

  test("is not defined below three samples, and grows less than the scatter does without them", () => {
    expect(() => jobSamplingContributionDb(2, 1)).toThrow(RangeError);
    expect(jobSamplingContributionDb(10, 2)).toBeLessThan(jobSamplingContributionDb(5, 2));
  });
});

describe("sampling by task: hand calculation", () => {
  // 101, 102 and 104 dB: mean 102.333, squares 1.778 + 0.111 + 2.778 = 4.667, over 3·2: 0.778, root 0.882.
  test("u1a of three samples is divided by the root of their number", () => {
    expect(samplingUncertaintyDb([101, 102, 104])).toAgreeWithPrinted("0.882");
  });

  test("the job's scatter is not", () => {
    // The same squares over 2: 2.333, root 1.528.
    expect(jobSamplingUncertaintyDb([101, 102, 104])).toAgreeWithPrinted("1.528");
  });

  test("the level is the mean by energy: 10 lg of (1.259 + 1.585 + 2.512)·10¹⁰ / 3", () => {
    expect(taskLevelDb([101, 102, 104])).toAgreeWithPrinted("102.52");
  });

  test("one sample has no u1a, which is not zero", () => {
    expect(samplingUncertaintyDb([101])).toBeNull();
    expect(samplingUncertaintyDb([])).toBeNull();
  });

  test("a budget of two tasks by hand", () => {
    // Shares 0.8 and 0.2; u2 = 1.5, u3 = 1: 0.68·(2.25 + 1) = 2.21; u1a 0.5 and 1: 0.16 + 0.04 = 0.2;
    // u1b 12 min of 240 in the first: (4.343·0.8/240·12)² = 0.0302. Sum 2.440, root 1.562, times 1.65: 2.577.
    const budget = uncertaintyBudget([
      {
        taskId: "a",
        energyShare: 0.8,
        durationMin: 240,
        samplingDb: 0.5,
        durationUncertaintyMin: 12,
        instrumentDb: 1.5,
      },
      {
        taskId: "b",
        energyShare: 0.2,
        durationMin: 240,
        samplingDb: 1,
        durationUncertaintyMin: 0,
        instrumentDb: 1.5,
      },
    ]);
    expect(budget.instrumentDb2 + budget.positionDb2).toAgreeWithPrinted("2.21");
    expect(budget.samplingDb2).toAgreeWithPrinted("0.200");
    expect(budget.durationDb2).toAgreeWithPrinted("0.030");
    expect(budget.expandedDb).toAgreeWithPrinted("2.58");
  });

  test("a reading of one day carries instrument and position only: 1.65·√(1.5² + 1²)", () => {
    const { expandedDb } = uncertaintyBudget([
      {
        taskId: null,
        energyShare: 1,
        durationMin: 480,
        samplingDb: null,
        durationUncertaintyMin: 0,
        instrumentDb: 1.5,
      },
    ]);
    expect(expandedDb).toAgreeWithPrinted("2.97");
  });
});
