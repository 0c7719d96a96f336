import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  asksForMore,
  drawWorkers,
  planFullDaySampling,
  planJobSampling,
  planTaskSampling,
  preselectStrategy,
  workPattern,
} from "../../shared/acoustics/survey-plan";

const task = {
  durationMin: 60,
  pattern: "steady",
  cycleMin: null,
  samplesDb: [] as readonly number[],
} as const;
const codes = ({ reasons }: { reasons: readonly { code: string }[] }) =>
  reasons.map(({ code }) => code);

describe("ISO 9612:2009 9.3, samples of a task (memory)", () => {
  test("three of 5 min", () => {
    const plan = planTaskSampling(task);
    expect(plan).toMatchObject({ sampleCount: 3, sampleMin: 5, totalMin: 15, missingCount: 3 });
    expect(codes(plan)).toEqual(["three-samples", "five-minutes"]);
  });

  test("a task of less than 5 min is measured whole", () => {
    const plan = planTaskSampling({ ...task, durationMin: 3 });
    expect(plan).toMatchObject({ sampleCount: 3, sampleMin: 3 });
    expect(codes(plan)).toContain("whole-short-task");
  });

  test("cyclic noise in whole cycles: three or more, together 5 min or more", () => {
    expect(planTaskSampling({ ...task, pattern: "cyclic", cycleMin: 4 }).sampleMin).toBe(12);
    expect(planTaskSampling({ ...task, pattern: "cyclic", cycleMin: 0.5 }).sampleMin).toBe(5);
    expect(planTaskSampling({ ...task, pattern: "cyclic", cycleMin: 0.7 }).sampleMin).toBeCloseTo(
      5.6,
      12,
    );
    expect(planTaskSampling({ ...task, pattern: "cyclic", cycleMin: 40 }).sampleMin).toBe(60);
  });

  test("fluctuating noise takes longer", () => {
    const plan = planTaskSampling({ ...task, pattern: "fluctuating" });
    expect(plan.sampleMin).toBe(20);
    expect(codes(plan)).toContain("longer-for-fluctuating");
  });

  test("three more where those taken differ by 3 dB or more", () => {
    const plan = planTaskSampling({ ...task, samplesDb: [82.3, 84, 85.3] });
    expect(plan).toMatchObject({ sampleCount: 6, missingCount: 3 });
    expect(codes(plan)).toContain("large-spread");
    expect(planTaskSampling({ ...task, samplesDb: [82.4, 84, 85.3] }).missingCount).toBe(0);
    expect(asksForMore([85])).toBe(false);
  });
});

describe("ISO 9612:2009 10.2, samples of a job (memory)", () => {
  test("Annex E: a group of 18 asks for 10.75 h", () => {
    const plan = planJobSampling({ groupSize: 18, shiftMin: 450, samplesDb: [] });
    expect(plan).toMatchObject({ sampleCount: 5, totalMin: 645, sampleMin: 129 });
    expect(plan.reasons[0]).toEqual({
      code: "group-size",
      clause: "10.2 Table 1",
      isRevisedIn2025: true,
    });
    // As in the example, six samples of some 2 h.
    const six = planJobSampling({ groupSize: 18, shiftMin: 450, samplesDb: [88], sampleCount: 6 });
    expect(six).toMatchObject({ sampleCount: 6, sampleMin: 107.5, missingCount: 5 });
  });

  test("no sample is longer than the shift", () => {
    const plan = planJobSampling({ groupSize: 41, shiftMin: 120, samplesDb: [] });
    expect(plan).toMatchObject({ sampleCount: 9, totalMin: 1_020 });
    expect(plan.sampleMin).toBeLessThanOrEqual(120);
    expect(codes(plan)).toContain("split-large-group");
  });

  test("fewer than five samples are no plan", () => {
    const job = { groupSize: 3, shiftMin: 480, samplesDb: [] };
    expect(() => planJobSampling({ ...job, sampleCount: 4 })).toThrow(RangeError);
    expect(() => planJobSampling({ ...job, groupSize: 0 })).toThrow(RangeError);
  });
});

describe("ISO 9612:2009 11, full days (memory)", () => {
  test("three, and two more where they differ by 3 dB or more", () => {
    const day = { shiftMin: 480, samplesDb: [] };
    expect(planFullDaySampling(day)).toMatchObject({ sampleCount: 3, sampleMin: 480 });
    const plan = planFullDaySampling({ ...day, samplesDb: [88, 91.9, 87.6] });
    expect(plan).toMatchObject({ sampleCount: 5, missingCount: 2 });
    expect(codes(plan)).toEqual(["three-days", "whole-day", "large-spread"]);
  });
});

describe("ISO 9612:2009 Table B.1 (memory)", () => {
  test.each([
    ["fixed-simple", "task", []],
    ["fixed-complex", "task", ["job", "full-day"]],
    ["mobile-few-tasks", "task", ["job", "full-day"]],
    ["mobile-many-tasks", "full-day", ["job", "task"]],
    ["mobile-unpredictable", "full-day", ["job"]],
    ["tasks-without-durations", "job", ["full-day"]],
    ["no-assigned-tasks", "job", ["full-day"]],
  ] as const)("%s: %s", (pattern, strategy, alternatives) => {
    expect(preselectStrategy(pattern)).toMatchObject({ strategy, alternatives, reason: pattern });
  });

  test("the pattern that the records speak for", () => {
    const job = { taskCount: 3, isMobile: false, hasDurations: true, isPredictable: true };
    expect(workPattern(job)).toBe("fixed-complex");
    expect(workPattern({ ...job, taskCount: 1 })).toBe("fixed-simple");
    expect(workPattern({ ...job, taskCount: 0 })).toBe("no-assigned-tasks");
    expect(workPattern({ ...job, hasDurations: false })).toBe("tasks-without-durations");
    expect(workPattern({ ...job, isMobile: true })).toBe("mobile-few-tasks");
    expect(workPattern({ ...job, isMobile: true, taskCount: 9 })).toBe("mobile-many-tasks");
    expect(workPattern({ ...job, isMobile: true, isPredictable: false })).toBe(
      "mobile-unpredictable",
    );
  });
});

describe("drawing workers", () => {
  const ids = Array.from({ length: 12 }, (_, place) => `worker-${place}`);

  test("the same seed and list, in whatever order, give the same draw", () => {
    fc.assert(
      fc.property(fc.string(), fc.integer({ min: 1, max: 15 }), (seed, count) => {
        const draw = drawWorkers(ids, count, seed);
        expect(drawWorkers([...ids].reverse(), count, seed)).toEqual(draw);
        const all = [...draw.drawn, ...draw.reserve];
        expect(new Set(all).size).toBe(all.length);
        expect(draw.drawn.length).toBe(Math.min(count, 12));
        expect(draw.reserve.length).toBe(Math.max(0, Math.min(2, 12 - count)));
        expect(all.every((id) => ids.includes(id))).toBe(true);
      }),
    );
  });

  test("everybody has the same chance: χ² of 6,000 draws of 3 of 12 stays below its 0.1 % value", () => {
    const times = new Map(ids.map((id) => [id, 0]));
    for (let round = 0; round < 6_000; round++)
      for (const id of drawWorkers(ids, 3, `survey-${round}`).drawn)
        times.set(id, times.get(id)! + 1);
    let chiSquare = 0;
    for (const count of times.values()) chiSquare += (count - 1_500) ** 2 / 1_500;
    // 11 degrees of freedom, printed table: 31.26.
    expect(chiSquare).toBeLessThan(31.26);
  });

  test("nobody drawn is no draw", () => {
    expect(() => drawWorkers(ids, 0, "x")).toThrow(RangeError);
  });
});
