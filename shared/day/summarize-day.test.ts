import { expect, test } from "vitest";
import {
  buildLevel,
  buildProtection,
  buildTask,
  dayOf as dayOfTasks,
  settings,
} from "../../tests/published/build-day";
import { evaluateDay } from "../acoustics/day";
import type { DayInput, LevelMetric } from "../acoustics/types";
import { ruleSetInForce } from "../rule-sets";
import { summarizeDay } from "./summarize-day";

const governing = ruleSetInForce("us-general-industry", "2026-03-02")!;

/** Eight hours of one task at 98 dB under a plug whose label says 29. */
const dayOf = (metric: LevelMetric): DayInput =>
  dayOfTasks(
    buildTask("Hammering", 480, buildLevel(98, { metric }), {
      protection: buildProtection({ kind: "foam-plug", name: "Plug", usRatingDb: 29 }),
      wornPct: 100,
    }),
  );

const summaryOf = (metric: LevelMetric) => {
  const input = dayOf(metric);
  return summarizeDay(input, evaluateDay(input, governing, []), governing);
};

test("a steady level under a label is what it is while worn", () => {
  // 29 CFR 1910.95 App. B: 98 − (29 − 7).
  const { whileWornDb, whileWornBound, doseBound } = summaryOf({ kind: "steady" });
  expect(whileWornDb).toBeCloseTo(76, 9);
  expect(whileWornBound).toBe("exact");
  expect(doseBound).toBe("exact");
});

test("an average with a threshold only bounds the level while worn, on the side on which the day stands", () => {
  const summary = summaryOf({ kind: "lavg", settings: settings(5, 90) });
  // By hand: what lay under the threshold of 90 dB adds at most the weight of 90 dB all the time,
  // 90 + 5·log2(2^((98 − 90)/5) + 1) = 100.056; less 22.
  expect(summary.whileWornDb).toBeCloseTo(90 + 5 * Math.log2(2 ** 1.6 + 1) - 22, 9);
  expect(summary.whileWornBound).toBe("upper");
  expect(summary.atEarBound).toBe("upper");
  expect(summary.whileWornDb).toBeCloseTo(summary.atEarDb!, 9);
  // The dose with a threshold of 90 is the instrument's own: 100 · 2^((98 − 90)/5).
  expect(summary.dosePct).toBeCloseTo(100 * 2 ** 1.6, 6);
});

test("the uncertainty of an energy level never stands beside an average of 5 dB exchange", () => {
  // ISO 9612 states it of LEX; 29 CFR 1910.95 App. A has no such quantity.
  const input = dayOf({ kind: "steady" });
  const task = input.shifts[0]!.tasks[0]!;
  const sampled: DayInput = {
    ...input,
    shifts: [
      {
        ...input.shifts[0]!,
        tasks: [
          {
            ...task,
            level: { ...task.level!, samplesDb: [98, 98, 98], instrument: "dosimeter" },
          },
        ],
      },
    ],
  };
  const under = (key: string) => {
    const ruleSet = ruleSetInForce(key, input.date)!;
    return summarizeDay(sampled, evaluateDay(sampled, ruleSet, []), ruleSet).uncertaintyDb;
  };
  expect(under("uk-2005")).toBeGreaterThan(0);
  expect(under("us-general-industry")).toBeNull();
});
