import { describe, expect, test } from "vitest";
import { allowedMin, dosePct, twaDb } from "../../shared/acoustics/dose";
import { lawOf } from "../../shared/acoustics/exchange-law";
import { ruleSet } from "./build-day";
import "../setup/printed";

const limit = ruleSet("niosh-rel").criteria.find(({ id }) => id === "limit")!;
const law = lawOf(limit);
const twaRule = { criterionLevelDb: 85, exchangeRateDb: 3, twaFactor: limit.twaFactor };

/**
 * Cells of Table 1-1 that the formula does not give. At 99 dB(A) 18 min 59 s is printed for 18 min 53.9 s; at 124 3 s
 * for 3.52 s; at 127 1 s for 1.76 s: the formula is kept.
 */
const IRREGULAR = new Set([99, 124, 127]);

describe("NIOSH 98-126 Table 1-1 (reprint)", () => {
  // Hours and minutes down to 94 dB(A), minutes and seconds from there on; formula as durations by halving at 3 dB.
  test.each([
    [80, 91440, "91434.301"],
    [81, 72600, "72571.452"],
    [82, 57600, "57600.0"],
    [83, 45720, "45717.15"],
    [84, 36300, "36285.726"],
    [85, 28800, "28800.0"],
    [86, 22860, "22858.575"],
    [87, 18120, "18142.863"],
    [88, 14400, "14400.0"],
    [89, 11400, "11429.288"],
    [90, 9060, "9071.432"],
    [91, 7200, "7200.0"],
    [92, 5700, "5714.644"],
    [93, 4560, "4535.716"],
    [94, 3600, "3600.0"],
    [95, 2857, "2857.322"],
    [96, 2268, "2267.858"],
    [97, 1800, "1800.0"],
    [98, 1429, "1428.661"],
    [99, 1139, "1133.929"],
    [100, 900, "900.0"],
    [101, 714, "714.33"],
    [102, 567, "566.964"],
    [103, 450, "450.0"],
    [104, 357, "357.165"],
    [105, 283, "283.482"],
    [106, 225, "225.0"],
    [107, 179, "178.583"],
    [108, 142, "141.741"],
    [109, 113, "112.5"],
    [110, 89, "89.291"],
    [111, 71, "70.871"],
    [112, 56, "56.25"],
    [113, 45, "44.646"],
    [114, 35, "35.435"],
    [115, 28, "28.125"],
    [116, 22, "22.323"],
    [117, 18, "17.718"],
    [118, 14, "14.062"],
    [119, 11, "11.161"],
    [120, 9, "8.859"],
    [121, 7, "7.031"],
    [122, 6, "5.581"],
    [123, 4, "4.429"],
    [124, 3, "3.516"],
    [125, 3, "2.79"],
    [126, 2, "2.215"],
    [127, 1, "1.758"],
    [128, 1, "1.395"],
    [129, 1, "1.107"],
  ])("at %d dB(A) %d s are allowed, %s s by its formula", (levelDb, printedS, formulaS) => {
    const computedS = allowedMin(levelDb, law) * 60;
    expect(computedS).toAgreeWithPrinted(formulaS);
    const lastDigitS = printedS >= 3600 ? 60 : 1;
    const agrees = Math.abs(computedS - printedS) <= lastDigitS / 2;
    expect(agrees).toBe(!IRREGULAR.has(levelDb));
  });
});

describe("NIOSH 98-126 Table 1-2 (rows from memory, values computed by 10 lg(D/100) + 85)", () => {
  test.each([
    [20, "78.0"],
    [30, "79.8"],
    [40, "81.0"],
    [50, "82.0"],
    [60, "82.8"],
    [70, "83.5"],
    [80, "84.0"],
    [90, "84.5"],
    [100, "85.0"],
    [110, "85.4"],
    [120, "85.8"],
    [130, "86.1"],
    [140, "86.5"],
    [150, "86.8"],
    [170, "87.3"],
    [200, "88.0"],
    [250, "89.0"],
    [300, "89.8"],
    [350, "90.4"],
    [400, "91.0"],
    [450, "91.5"],
    [500, "92.0"],
    [600, "92.8"],
    [700, "93.5"],
    [800, "94.0"],
    [900, "94.5"],
    [1000, "95.0"],
    [1100, "95.4"],
    [1200, "95.8"],
    [1300, "96.1"],
    [1400, "96.5"],
    [1500, "96.8"],
    [1600, "97.0"],
    [1700, "97.3"],
    [1800, "97.6"],
    [1900, "97.8"],
    [2000, "98.0"],
    [2500, "99.0"],
    [3000, "99.8"],
    [3500, "100.4"],
    [4000, "101.0"],
    [4500, "101.5"],
    [5000, "102.0"],
    [6000, "102.8"],
    [7000, "103.5"],
    [8000, "104.0"],
    [9000, "104.5"],
    [10000, "105.0"],
  ])("a dose of %d % is a TWA of %s dB", (dose, printedDb) => {
    expect(twaDb(dose, twaRule)).toAgreeWithPrinted(printedDb);
  });
});

test("8 h at 115 dB(A) is 115.1: a TWA by 10 lg beside durations by halving at 3 dB (memory)", () => {
  const dose = dosePct([{ levelDb: 115, durationMin: 480 }], law);
  expect(twaDb(dose, twaRule)).toAgreeWithPrinted("115.1");
});
