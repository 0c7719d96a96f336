import { describe, expect, test } from "vitest";
import {
  energySumDb,
  lex8hDb,
  lex8hOfExposureDb,
  lexWeeklyDb,
  soundExposurePa2h,
} from "../../shared/acoustics/exposure";
import { agreesWithPrinted } from "../setup/printed";
import "../setup/printed";

/** Points of a day: 100 at 85 dB. */
const pointsOf = (dailyDb: number) =>
  100 * 10 ** ((lex8hDb([{ levelDb: dailyDb, durationMin: 480 }]) - 85) / 10);

/** Printed points are rounded to steps of 5 and 10; the unrounded ones are kept. */
describe("HSE weekly ready-reckoner, points of a day (confirmed)", () => {
  test.each([
    [95, 1000, "1000.0"],
    [94, 790, "794.33"],
    [93, 630, "630.96"],
    [92, 500, "501.19"],
    [91, 400, "398.11"],
    [90, 315, "316.23"],
    [89, 250, "251.19"],
    [88, 200, "199.53"],
    [87, 160, "158.49"],
    [86, 125, "125.89"],
    [85, 100, "100.0"],
    [84, 80, "79.43"],
    [83, 65, "63.1"],
    [82, 50, "50.12"],
    [81, 40, "39.81"],
    [80, 32, "31.62"],
    [79, 26, "25.12"],
    [78, 20, "19.95"],
  ])("%d dB: %d points, unrounded %s", (dailyDb, printed, exact) => {
    expect(pointsOf(dailyDb)).toAgreeWithPrinted(exact);
    expect(Math.abs(pointsOf(dailyDb) / printed - 1)).toBeLessThan(0.04);
  });
});

describe("HSE weekly ready-reckoner, level of a week's points (confirmed)", () => {
  test.each([
    [5000, 95],
    [4000, 94],
    [3200, 93],
    [2500, 92],
    [2000, 91],
    [1600, 90],
    [1250, 89],
    [1000, 88],
    [790, 87],
    [630, 86],
    [500, 85],
    [395, 84],
    [315, 83],
    [250, 82],
    [200, 81],
    [160, 80],
    [125, 79],
    [100, 78],
  ])("%d points are a week of %d dB", (points, weeklyDb) => {
    const oneDay = 85 + 10 * Math.log10(points / 100);
    expect(lexWeeklyDb([oneDay])).toAgreeWithPrinted(String(weeklyDb));
  });
});

describe("weekly level", () => {
  test("seven days at 85 dB are 86.46: the divisor is 5 whatever the days (computed)", () => {
    expect(lexWeeklyDb(Array(7).fill(85))).toAgreeWithPrinted("86.46");
  });

  test("no day is not a quiet week", () => {
    expect(() => lexWeeklyDb([])).toThrow(RangeError);
  });
});

describe("IEC 61252, sound exposure over 8 h (computed)", () => {
  test.each([
    [80, "0.32", "1152.0"],
    [85, "1.0119", "3642.9"],
    [87, "1.6038", "5773.7"],
    [90, "3.2", "11520.0"],
    [100, "32.0", "115200.0"],
  ])("8 h at %d dB are %s Pa²h, %s Pa²s", (levelDb, pa2h, pa2s) => {
    const exposure = soundExposurePa2h([{ levelDb, durationMin: 480 }]);
    expect(exposure).toAgreeWithPrinted(pa2h);
    expect(agreesWithPrinted(exposure * 3600, pa2s)).toBe(true);
  });

  test("1 Pa²h over 8 h is 84.9485 dB, and 140 Pa a peak of 136.9", () => {
    expect(lex8hOfExposureDb(1)).toAgreeWithPrinted("84.9485");
    expect(20 * Math.log10(140 / 20e-6)).toAgreeWithPrinted("136.9");
    expect(lex8hOfExposureDb(0)).toBeNull();
  });
});

test("two equal levels are 3 dB more", () => {
  expect(energySumDb([80, 80])).toAgreeWithPrinted("83.01");
});
