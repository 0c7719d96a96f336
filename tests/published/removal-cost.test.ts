import { describe, expect, test } from "vitest";
import { evaluateDay } from "../../shared/acoustics/day";
import {
  effectiveAttenuationDb,
  removalCostDb,
} from "../../shared/acoustics/protection/wearing-time";
import { removalCosts } from "../../shared/acoustics/removal-costs";
import type { DayInput } from "../../shared/acoustics/types";
import {
  buildDay,
  buildLevel,
  buildProtection,
  buildReading,
  buildShift,
  buildTask,
  dayOf,
  ruleSet,
  STEADY,
  settings,
} from "./build-day";
import "../setup/printed";

/** Expected values by the closed form, worked out by hand; no document prints them unless one is named. */

const UK = ruleSet("uk-2005");
const EU = ruleSet("eu-2003-10-ec");
const US = ruleSet("us-general-industry");
const BY_5_DB = 5 / Math.log10(2);

describe("what a time without the protector costs", () => {
  test("5 min of 8 h at 100 dB, 30 dB: 10 lg(475/480 + 5/480 · 1000) = 10.57", () => {
    const dayDb = 10 * Math.log10((475 / 480) * 10 ** 7 + (5 / 480) * 10 ** 10);
    const off = { offMin: 5, outsideDb: 100, wornDb: 70 };
    expect(removalCostDb(dayDb, [off], 480, 10)).toAgreeWithPrinted("10.57");
  });

  test("HSE guidance: 30 dB off for 30 min of 8 h gives 12, so it costs 18 (memory)", () => {
    const dayDb = 100 - effectiveAttenuationDb(30, (100 * 450) / 480, 10);
    const off = { offMin: 30, outsideDb: 100, wornDb: 70 };
    expect(removalCostDb(dayDb, [off], 480, 10)).toAgreeWithPrinted("18");
  });

  test("an hour of 8 under a 5 dB rule, 20 dB: 5 · log2((7 · 2^-4 + 1) / (8 · 2^-4)) = 7.62", () => {
    const dayDb = 95 - effectiveAttenuationDb(20, 87.5, BY_5_DB);
    const off = { offMin: 60, outsideDb: 95, wornDb: 75 };
    expect(removalCostDb(dayDb, [off], 480, BY_5_DB)).toAgreeWithPrinted("7.62");
  });

  test("nothing off costs nothing, and no more than the day is taken out of it", () => {
    expect(removalCostDb(80, [], 480, 10)).toBeCloseTo(0, 12);
    const off = { offMin: 480, outsideDb: 100, wornDb: 70 };
    expect(() => removalCostDb(80, [off], 480, 10)).toThrow(RangeError);
  });
});

describe("of a whole day, by task", () => {
  const protection = buildProtection({ snrDb: 28 });
  const cell = (wornPct: number | null) =>
    buildTask("cell", 120, buildLevel(102, { lcMinusLaDb: 1 }), { protection, wornPct });
  const bench = (wornPct: number | null) =>
    buildTask("bench", 300, buildLevel(91, { lcMinusLaDb: 2 }), { protection, wornPct });
  const office = buildTask("office", 60, buildLevel(62));
  const atEarDb = (day: DayInput, rules = UK) => evaluateDay(day, rules, []).atEarDb!;

  test.each([UK, EU])("agrees with the day evaluated with it worn throughout: $key", (rules) => {
    const day = dayOf(cell(95), bench(80), office);
    const { tasks, throughoutDb } = removalCosts(day, rules)!;
    expect(tasks.map(({ taskId }) => taskId)).toEqual(["cell", "bench"]);
    expect(tasks.map(({ offMin }) => offMin)).toEqual([
      expect.closeTo(6, 9),
      expect.closeTo(60, 9),
    ]);
    expect(tasks[0]!.costDb).toBeCloseTo(
      atEarDb(day, rules) - atEarDb(dayOf(cell(100), bench(80), office), rules),
      9,
    );
    expect(throughoutDb).toBeCloseTo(atEarDb(dayOf(cell(100), bench(100), office), rules), 9);
  });

  test("where a reading governs, its factor is in the cost", () => {
    const ofReading = (wornPct: number) =>
      buildDay([
        buildShift(480, [cell(wornPct), bench(100), office], {
          readings: [buildReading(settings(3, null), { averageDb: 99.3 })],
        }),
      ]);
    expect(removalCosts(ofReading(90), UK)!.tasks[0]!.costDb).toBeCloseTo(
      atEarDb(ofReading(90)) - atEarDb(ofReading(100)),
      9,
    );
  });

  test("under a 5 dB rule, of steady levels", () => {
    const us = buildProtection({ usRatingDb: 27 });
    const task = (wornPct: number) =>
      dayOf(
        buildTask("cell", 480, buildLevel(98, { metric: STEADY }), { protection: us, wornPct }),
      );
    expect(removalCosts(task(75), US)!.tasks[0]!.costDb).toBeCloseTo(
      atEarDb(task(75), US) - atEarDb(task(100), US),
      9,
    );
  });

  test("two times in one task are one cost", () => {
    const again = { ...cell(50), id: "cell again" };
    const { tasks, throughoutDb } = removalCosts(dayOf(cell(95), again, bench(100)), UK)!;
    expect(tasks).toHaveLength(1);
    expect(tasks[0]!.offMin).toBeCloseTo(66, 9);
    expect(throughoutDb).toBeCloseTo(
      atEarDb(dayOf(cell(95), again, bench(100))) - tasks[0]!.costDb,
      9,
    );
  });

  test("nothing is said where it was worn throughout, or where wearing or a level is not known", () => {
    expect(removalCosts(dayOf(cell(100), bench(100)), UK)).toBeNull();
    expect(removalCosts(dayOf(cell(95), bench(null)), UK)).toBeNull();
    expect(removalCosts(dayOf(cell(95), buildTask("hall", 60, null)), UK)).toBeNull();
    expect(removalCosts(dayOf(office), UK)).toBeNull();
  });
});
