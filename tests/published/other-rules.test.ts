import { describe, expect, test } from "vitest";
import { evaluateDay } from "../../shared/acoustics/day";
import { allowedMin, dosePct, tableDosePct } from "../../shared/acoustics/dose";
import { lawOf, tableAllowedMin } from "../../shared/acoustics/exchange-law";
import { lex8hDb } from "../../shared/acoustics/exposure";
import { NR_15_TABLE } from "../../shared/rule-sets/brazil-nr-15";
import { buildLevel, buildTask, dayOf, ruleSet, STEADY } from "./build-day";
import "../setup/printed";

describe("NR-15 Annex 1 (reprint): the table is the rule", () => {
  test.each([
    [85, 480],
    [86, 420],
    [87, 360],
    [88, 300],
    [89, 270],
    [90, 240],
    [91, 210],
    [92, 180],
    [93, 160],
    [94, 135],
    [95, 120],
    [96, 105],
    [98, 75],
    [100, 60],
    [102, 45],
    [104, 35],
    [105, 30],
    [106, 25],
    [108, 20],
    [110, 15],
    [112, 10],
    [114, 8],
    [115, 7],
  ])("at %d dB(A) %d min are allowed", (levelDb, printedMin) => {
    expect(tableAllowedMin(levelDb, NR_15_TABLE)).toBe(printedMin);
    expect(tableDosePct([{ levelDb, durationMin: printedMin }], NR_15_TABLE)).toBe(100);
  });

  test.each([
    [85.1, 420],
    [97, 75],
    [96.01, 75],
    [113, 8],
  ])("%d dB(A) lies between rows and takes the %d min of the next higher one", (levelDb, min) => {
    expect(tableAllowedMin(levelDb, NR_15_TABLE)).toBe(min);
  });

  test("less than the first row has no allowed time and counts nothing", () => {
    expect(tableDosePct([{ levelDb: 84.9, durationMin: 480 }], NR_15_TABLE)).toBe(0);
  });

  test("a day of two levels is judged by the sum of its fractions", () => {
    const day = dayOf(
      buildTask("saw", 60, buildLevel(95, { metric: STEADY })), // 60/120
      buildTask("lathe", 180, buildLevel(90, { metric: STEADY })), // 180/240
    );
    const [action, limit] = evaluateDay(day, ruleSet("brazil-nr-15"), []).criteria;
    expect(limit).toMatchObject({ dosePct: 125, verdict: "over" });
    expect(action).toMatchObject({ dosePct: 125, verdict: "over" });
  });
});

/** Printed to two figures; 8 h divided by 10^0.1 for each decibel above 87, the energy law and no halving at 3 dB. */
describe("SOR/86-304 schedule (reprint)", () => {
  test.each([
    [83, "20"],
    [84, "16"],
    [85, "13"],
    [86, "10"],
    [87, "8.0"],
    [88, "6.4"],
    [89, "5.0"],
    [90, "4.0"],
    [91, "3.2"],
    [92, "2.5"],
    [93, "2.0"],
    [94, "1.6"],
    [95, "1.3"],
    [96, "1.0"],
    [97, "0.8"],
    [98, "0.64"],
    [99, "0.5"],
    [100, "0.4"],
    [101, "0.32"],
  ])("at %d dB(A) %s h bring the level over 8 h to the limit of 87", (levelDb, printedH) => {
    const hours = 8 * 10 ** ((87 - lex8hDb([{ levelDb, durationMin: 480 }])) / 10);
    expect(hours).toAgreeWithPrinted(printedH);
  });
});

describe("ACGIH TLV (memory)", () => {
  const law = lawOf(ruleSet("acgih-tlv").criteria[0]!);
  test.each([
    [80, 86400],
    [82, 57600],
    [85, 28800],
    [88, 14400],
    [91, 7200],
    [94, 3600],
    [97, 1800],
    [100, 900],
    [103, 450],
    [106, 225],
    [109, 112.8],
    [112, 56.4],
    [115, 28.12],
    [118, 14.06],
    [121, 7.03],
    [124, 3.52],
    [127, 1.76],
    [130, 0.88],
    [133, 0.44],
    [136, 0.22],
    [139, 0.11],
  ])("at %d dB(A) %d s", (levelDb, printedS) => {
    // From memory, printed as rounded halvings of the row before: 0.3 % apart at most, but for the first row.
    const seconds = allowedMin(levelDb, law) * 60;
    const near = levelDb === 80 ? 0.06 : 0.05;
    expect(Math.abs(seconds / printedS - 1)).toBeLessThan(near);
  });
});

describe("long shifts (computed; the US action level from a reprint's formula)", () => {
  const us = { criterionLevelDb: 90, exchangeRateDb: 5, thresholdDb: null, referenceMin: 480 };
  test.each([
    [4, "90.0", "95.0", "88.01", "90.01"],
    [6, "87.08", "92.08", "86.25", "88.25"],
    [8, "85.0", "90.0", "85.0", "87.0"],
    [9, "84.15", "89.15", "84.49", "86.49"],
    [10, "83.39", "88.39", "84.03", "86.03"],
    [11, "82.7", "87.7", "83.62", "85.62"],
    [12, "82.08", "87.08", "83.24", "85.24"],
    [14, "80.96", "85.96", "82.57", "84.57"],
    [16, "80.0", "85.0", "81.99", "83.99"],
    [20, "78.39", "83.39", "81.02", "83.02"],
    [24, "77.07", "82.08", "80.23", "82.23"],
  ])(
    "a shift of %d h: 50 % at %s, 100 % at %s, NIOSH %s, Canada %s",
    (hours, action, limit, niosh, canada) => {
      const durationMin = hours * 60;
      // Printed to 0.01 dB: half a digit is 0.07 % of a 5 dB dose, 0.12 % of a 3 dB one.
      expect(dosePct([{ levelDb: Number(action), durationMin }], us)).toBeCloseTo(50, 0);
      expect(dosePct([{ levelDb: Number(limit), durationMin }], us)).toBeCloseTo(100, 0);
      expect(lex8hDb([{ levelDb: Number(niosh), durationMin }])).toBeCloseTo(85, 1);
      expect(lex8hDb([{ levelDb: Number(canada), durationMin }])).toBeCloseTo(87, 1);
    },
  );
});

describe("Australia, model WHS regulation 56 (memory; Western Australia's confirmed)", () => {
  test.each([
    [85, "under"],
    [85.1, "over"],
  ])("8 h at %d dB is %s", (levelDb, verdict) => {
    const day = dayOf(buildTask("press", 480, buildLevel(levelDb)));
    expect(evaluateDay(day, ruleSet("australia"), []).criteria[0]).toMatchObject({ verdict });
  });

  test.each([
    [140, "under"],
    [140.1, "over"],
  ])("a C-weighted peak of %d dB is %s", (levelDb, verdict) => {
    const peak = { levelDb, weighting: "C" } as const;
    const day = dayOf(buildTask("press", 480, buildLevel(80, { peak })));
    expect(evaluateDay(day, ruleSet("australia"), []).criteria[1]).toMatchObject({ verdict });
  });
});
