import { expect, test } from "vitest";
import { evaluateDay } from "../../shared/acoustics/day";
import { ruleSetInForce } from "../../shared/rule-sets";
import { buildDay, buildLevel, buildProtection, buildShift, buildTask, STEADY } from "./build-day";

/**
 * 29 CFR 1910.95 Appendix B takes the protector off the shift's TWA. Time below the threshold is in neither figure, so
 * that the day at the ear lies under the TWA by what the protector takes off, and never above it.
 * 1 h at 95 dBA, by hand: dose 100·(60/240) = 25 %, TWA 90 + 16.61·lg 0.25 = 80.0.
 */
test("Appendix B: quiet time without a protector adds to neither the TWA nor the level at the ear", () => {
  const governing = ruleSetInForce("us-general-industry", "2026-03-02");
  if (!governing) throw new Error("the rule set is in force");
  const loud = buildTask("presses", 60, buildLevel(95, { metric: STEADY }), {
    protection: buildProtection({ usRatingDb: 29 }),
    wornPct: 100,
  });
  const quiet = buildTask("stores", 420, buildLevel(78, { metric: STEADY }));
  const evaluation = evaluateDay(buildDay([buildShift(480, [loud, quiet])]), governing, []);
  expect(evaluation.outsideDb).toBeCloseTo(80, 1);
  const { outsideDb, wornDb } = evaluation.tasks[0] ?? {};
  expect((evaluation.outsideDb ?? 0) - (evaluation.atEarDb ?? 0)).toBeCloseTo(
    (outsideDb ?? 0) - (wornDb ?? 0),
    1,
  );
});
