import { describe, expect, test } from "vitest";
import { evaluateDay } from "../../shared/acoustics/day";
import type { CriterionResult, DayInput, ReadingInput } from "../../shared/acoustics/types";
import { buildWorking } from "../../shared/acoustics/working";
import {
  buildDay,
  buildLevel,
  buildReading,
  buildShift,
  buildTask,
  ruleSet,
  settings,
} from "./build-day";
import "../setup/printed";

/**
 * Time that was left out of a run's history is no silence. Expected numbers are by hand, from the definitions of LEX and
 * of the dose: of a shift of 480 min, 115 min are kept, so that 10 lg(115/480) = −6.205 dB.
 */

const EU = ruleSet("eu-2003-10-ec");
const US = ruleSet("us-general-industry");

const laeq = (averageDb: number, fields: Partial<ReadingInput> = {}) =>
  buildReading(settings(3, null), { averageDb, durationMin: 115, ...fields });
const dose = (dosePct: number, fields: Partial<ReadingInput> = {}) =>
  buildReading(settings(5, 90), { dosePct, durationMin: 115, ...fields });

const UNKNOWN = { leftOut: { how: "unknown", minutes: 365 } } as const;
const LIKE = { leftOut: { how: "like-the-rest", minutes: 365 } } as const;
const quiet = (levelDb: number) => ({ leftOut: { how: "quiet", levelDb, minutes: 365 } }) as const;

function dayOf(readings: ReadingInput[], taskDb: number | null = 76): DayInput {
  const tasks = taskDb === null ? [] : [buildTask("grinding", 480, buildLevel(taskDb))];
  return buildDay([buildShift(480, tasks, { readings })]);
}

function judged(
  criterionId: string,
  rules: typeof EU,
  readings: ReadingInput[],
  taskDb: number | null = 76,
): CriterionResult {
  const { criteria } = evaluateDay(dayOf(readings, taskDb), rules, []);
  const found = criteria.find((one) => one.criterionId === criterionId);
  if (!found) throw new Error(criteria.map((one) => one.criterionId).join());
  return found;
}

const upper = (readings: ReadingInput[], taskDb: number | null = 76) =>
  judged("upper-action-worn", EU, readings, taskDb);
const limit = (readings: ReadingInput[]) => judged("limit", US, readings);

describe("how it was is unknown", () => {
  test("what is kept proves nothing Under, whatever the tasks say", () => {
    expect(upper([laeq(76.8, UNKNOWN)])).toMatchObject({
      verdict: "not-assessed",
      reason: "time-unknown",
      levelDb: null,
    });
    expect(upper([laeq(76.8, UNKNOWN)], null)).toMatchObject({ verdict: "not-assessed" });
    expect(limit([dose(25, UNKNOWN)])).toMatchObject({
      verdict: "not-assessed",
      reason: "time-unknown",
    });
  });

  test("ten minutes are enough for that", () => {
    const leftOut = { how: "unknown", minutes: 10 } as const;
    expect(upper([laeq(79, { durationMin: 470, leftOut })])).toMatchObject({
      verdict: "not-assessed",
    });
  });

  test("what is kept may prove Over: 96 − 6.205 = 89.8 at least", () => {
    const found = upper([laeq(96, UNKNOWN)]);
    expect(found).toMatchObject({ verdict: "over", bound: "lower" });
    expect(found.levelDb).toAgreeWithPrinted("89.795");
    const us = limit([dose(130, UNKNOWN)]);
    expect(us).toMatchObject({ verdict: "over", bound: "lower" });
    expect(us.dosePct).toAgreeWithPrinted("130.0");
  });

  test("the tasks may prove Over as well", () => {
    expect(upper([laeq(76.8, UNKNOWN)], 91)).toMatchObject({ verdict: "over", bound: "lower" });
  });

  test("a run that was projected is projected over the rest alone: (480 − 365) min at 96 dB", () => {
    const found = upper([laeq(96, { durationMin: 60, covers: "projected", ...UNKNOWN })]);
    expect(found).toMatchObject({ verdict: "over", bound: "lower" });
    expect(found.levelDb).toAgreeWithPrinted("89.795");
  });

  test("another reading over the whole shift governs", () => {
    const found = upper([laeq(76.8, UNKNOWN), laeq(79, { id: "meter", durationMin: 480 })]);
    expect(found).toMatchObject({ verdict: "under", bound: "exact", basis: "reading" });
    expect(found.levelDb).toAgreeWithPrinted("79.0");
  });

  test("no uncertainty is stated, and no maximum is known", () => {
    const reading = laeq(76.8, { ...UNKNOWN, peak: { levelDb: 130, weighting: "C" } });
    const evaluation = evaluateDay(dayOf([reading]), EU, []);
    expect([evaluation.uncertaintyDb, evaluation.uncertaintyReason]).toEqual([
      null,
      "time-unknown",
    ]);
    expect(judged("upper-action-peak", EU, [reading])).toMatchObject({
      verdict: "not-assessed",
      reason: "time-unknown",
    });
    const over = { ...reading, peak: { levelDb: 141, weighting: "C" } } as const;
    expect(judged("upper-action-peak", EU, [over])).toMatchObject({ verdict: "over" });
  });

  test("of a part of the shift it changes nothing", () => {
    const part = { covers: "part" } as const;
    expect(upper([laeq(76.8, { ...part, ...UNKNOWN })])).toEqual(upper([laeq(76.8, part)]));
  });
});

describe("it was like the rest", () => {
  test("the kept average stands for 115 + 365 min, and is marked as projected", () => {
    const found = upper([laeq(86, LIKE)]);
    expect(found).toMatchObject({ verdict: "over", bound: "exact", basis: "projected-reading" });
    expect(found.levelDb).toAgreeWithPrinted("86.0");
    expect(evaluateDay(dayOf([laeq(86, LIKE)]), EU, []).isProjected).toBe(true);
  });

  test("and so does the dose: 25 % · 480/115 = 104.35 %", () => {
    const found = limit([dose(25, LIKE)]);
    expect(found).toMatchObject({ verdict: "over", basis: "projected-reading" });
    expect(found.dosePct).toAgreeWithPrinted("104.35");
  });
});

describe("it was quiet", () => {
  test("its energy comes to what is kept: 10 lg((115·10^8.6 + 365·10^6.5)/480) = 79.79", () => {
    const found = upper([laeq(86, quiet(65))]);
    expect(found).toMatchObject({ verdict: "under", bound: "exact", basis: "reading" });
    expect(found.levelDb).toAgreeWithPrinted("79.90");
  });

  test("under the threshold it adds no dose, from it on it does: 100·365/480·2^0 = 76.04 %", () => {
    expect(limit([dose(25, quiet(70))]).dosePct).toAgreeWithPrinted("25.0");
    expect(limit([dose(25, quiet(90))])).toMatchObject({ verdict: "over" });
    expect(limit([dose(25, quiet(90))]).dosePct).toAgreeWithPrinted("101.04");
  });

  test("a projected run: 60 min stand for 480 − 365, and the quiet comes to them", () => {
    const found = upper([laeq(86, { durationMin: 60, covers: "projected", ...quiet(65) })]);
    expect(found.levelDb).toAgreeWithPrinted("79.90");
  });

  test("a slow maximum has its level too", () => {
    const reading = laeq(76.8, { ...quiet(70), lasMaxDb: 60 });
    const { criteria } = evaluateDay(dayOf([reading]), US, []);
    const ceiling = criteria.find(({ criterionId }) => criterionId === "ceiling");
    expect(ceiling).toMatchObject({ verdict: "under", levelDb: 70 });
  });
});

describe("the working says so", () => {
  const text = (reading: ReadingInput) => {
    const day = dayOf([reading]);
    return JSON.stringify(buildWorking(day, EU, [], evaluateDay(day, EU, [])));
  };

  test.each([
    [UNKNOWN, "how it was is not known"],
    [LIKE, "like the rest"],
    [quiet(65), "quiet"],
  ])("%o", (leftOut, word) => {
    expect(text(laeq(76.8, leftOut))).toContain(word);
  });
});
