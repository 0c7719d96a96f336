import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { evaluateDay } from "../../shared/acoustics/day";
import { governingReading, missingTime } from "../../shared/acoustics/day-sum";
import { lawOf, servesExactly } from "../../shared/acoustics/exchange-law";
import type {
  CriterionResult,
  DayInput,
  LevelMetric,
  ReadingInput,
} from "../../shared/acoustics/types";
import { RULE_SETS } from "../../shared/rule-sets";
import {
  buildDay,
  buildLevel,
  buildReading,
  buildShift,
  buildTask,
  LAEQ,
  lavg5,
  ruleSet,
  STEADY,
  settings,
} from "./build-day";
import "../setup/printed";

/**
 * Tasks and readings that contradict each other. Expected numbers are by hand, from the definition of the dose: an
 * average from 80 dB holds, over one from 90 dB, at most what a steady 90 dB would add, which is 100 % in 8 h.
 */

const US = ruleSet("us-general-industry");

function limitOf(
  metric: LevelMetric,
  levelDb: number,
  ...readings: ReadingInput[]
): CriterionResult {
  const task = buildTask("grinding", 480, buildLevel(levelDb, { metric }));
  const day = buildDay([buildShift(480, [task], { readings })]);
  return evaluateDay(day, US, []).criteria.find(({ criterionId }) => criterionId === "limit")!;
}

const from80 = (dosePct: number, fields: Partial<ReadingInput> = {}) =>
  buildReading(settings(5, 80), { dosePct, ...fields });

describe("a reading that contradicts the tasks is believed, as far as it goes", () => {
  // The task alone: at most 2^((84 − 90)/5) = 43.5 %.
  test("190 % from 80 dB are 90 to 190 % from 90 dB: neither Under nor Over", () => {
    const limit = limitOf(lavg5(80), 84, from80(190));
    expect(limit).toMatchObject({
      verdict: "cant-tell-yet",
      bound: "upper",
      reason: "only-upper-bound",
    });
    expect(limit.dosePct).toAgreeWithPrinted("190.0");
  });

  test("250 % from 80 dB are 150 to 250 % from 90 dB: Over, and at least 150 %", () => {
    const limit = limitOf(lavg5(80), 84, from80(250));
    expect(limit).toMatchObject({ verdict: "over", bound: "lower" });
    expect(limit.dosePct).toAgreeWithPrinted("150.0");
    // 90 + 16.61·lg 1.5 = 92.92.
    expect(limit.levelDb).toAgreeWithPrinted("92.92");
  });

  test("a reading of a part contradicts them too, and bounds nothing from above", () => {
    const limit = limitOf(lavg5(80), 84, from80(190, { durationMin: 240, covers: "part" }));
    // In 4 h the hidden part is at most 50 %: 140 % at least.
    expect(limit).toMatchObject({ verdict: "over", bound: "lower" });
    expect(limit.dosePct).toAgreeWithPrinted("140.0");
  });

  test("less than the tasks can have been", () => {
    // The task from 80 dB at 96 dB: 229.7 − 100 = 129.7 % at least. The reading: 60 % at most.
    const limit = limitOf(lavg5(80), 96, from80(60));
    expect(limit).toMatchObject({ verdict: "under", bound: "upper" });
    expect(limit.dosePct).toAgreeWithPrinted("60.0");
  });

  test("two readings that contradict each other leave what either allows", () => {
    const limit = limitOf(lavg5(80), 84, from80(250), from80(60, { id: "other" }));
    expect(limit).toMatchObject({ verdict: "under", bound: "upper" });
    // 0 to 60 % or 150 to 250 %, of which the tasks' 0 to 43.5 % is a part.
    expect(limit.dosePct).toAgreeWithPrinted("43.5");
    expect(limitOf(LAEQ, 110, from80(250), from80(60, { id: "other" }))).toMatchObject({
      verdict: "cant-tell-yet",
    });
  });
});

const metric = fc.constantFrom<LevelMetric>(LAEQ, STEADY, lavg5(80), lavg5(90), lavg5(null), {
  kind: "lavg",
  settings: settings(3, 80),
});
const levelDb = fc.double({ min: 60, max: 120, noNaN: true });
const task = fc.record({ levelDb, metric, durationMin: fc.integer({ min: 30, max: 240 }) });
const reading = fc.record({
  averageDb: levelDb,
  settings: fc
    .tuple(fc.constantFrom(3, 5), fc.constantFrom(null, 80, 90))
    .map(([exchangeRateDb, thresholdDb]) => settings(exchangeRateDb, thresholdDb)),
  durationMin: fc.integer({ min: 30, max: 480 }),
  covers: fc.constantFrom("shift", "part", "projected"),
});
const shift = fc
  .record({
    tasks: fc.array(task, { minLength: 1, maxLength: 3 }),
    readings: fc.array(reading, { maxLength: 3 }),
    unsaidMin: fc.constantFrom<number>(0, 60),
  })
  .map(({ tasks, readings, unsaidMin }) =>
    buildShift(
      tasks.reduce((sum, { durationMin }) => sum + durationMin, unsaidMin),
      tasks.map((one, index) =>
        buildTask(
          `task-${index}`,
          one.durationMin,
          buildLevel(one.levelDb, { metric: one.metric }),
        ),
      ),
      {
        readings: readings.map(({ settings: own, ...one }, index) =>
          buildReading(own, { ...one, id: `reading-${index}` }),
        ),
      },
    ),
  );

const ADDED_UP: ReadonlySet<string> = new Set(["lex-8h", "dose", "table-dose"]);

test("no figure is exact unless a reading under the rule's own settings, or tasks that serve it, are behind it", () => {
  fc.assert(
    fc.property(fc.array(shift, { minLength: 1, maxLength: 2 }), (shifts) => {
      const day: DayInput = buildDay(shifts);
      for (const result of evaluateDay(day, US, RULE_SETS).criteria) {
        const rules = RULE_SETS.find(({ key }) => key === result.ruleSetKey)!;
        const criterion = rules.criteria.find(({ id }) => id === result.criterionId)!;
        if (!ADDED_UP.has(criterion.quantity) || result.bound !== "exact") continue;
        if (result.levelDb === null && result.dosePct === null) continue;
        const law = lawOf(criterion);
        const isExact = day.shifts.every(
          (one) =>
            governingReading(one, law) !== undefined ||
            (missingTime(one) === null &&
              one.tasks.every(({ level }) => level !== null && servesExactly(level.metric, law))),
        );
        expect([result.criterionId, isExact]).toEqual([result.criterionId, true]);
      }
    }),
    { numRuns: 400 },
  );
});
