import { describe, expect, test } from "vitest";
import { dayUncertainty } from "../../shared/acoustics/day-uncertainty";
import type { TaskLevel } from "../../shared/acoustics/types";
import {
  budgetOfGroup,
  durationRangeUncertaintyMin,
  type GroupBudget,
  type GroupSurvey,
  observedDurationUncertaintyMin,
  surveyChanges,
  whatNarrowsMost,
} from "../../shared/acoustics/uncertainty";
import { buildLevel, buildTask, dayOf } from "./build-day";
import "../setup/printed";

function budget(survey: GroupSurvey): GroupBudget {
  const result = budgetOfGroup(survey);
  if (typeof result === "string") throw new Error(`No budget: ${result}`);
  return result;
}

/** ISO 9612:2009 Annex D, welders in three tasks, a class 1 meter (numbers from memory). */
const WELDERS: GroupSurvey = {
  strategy: "task",
  tasks: [
    {
      taskId: "planning",
      samplesDb: [70, 70],
      durationMin: 90,
      durationUncertaintyMin: 0,
      instrument: "class-1-meter",
    },
    {
      taskId: "welding",
      samplesDb: [80.1, 82.2, 79.6],
      durationMin: 300,
      durationUncertaintyMin: durationRangeUncertaintyMin(240, 360),
      instrument: "class-1-meter",
    },
    {
      taskId: "grinding",
      samplesDb: [86.5, 92.4, 89.3, 93.2, 87.8, 86.2],
      durationMin: 90,
      durationUncertaintyMin: durationRangeUncertaintyMin(60, 120),
      instrument: "class-1-meter",
    },
  ],
};

/** ISO 9612:2009 Annex E, a production line of 18: six samples, dosimeters, 7.5 h (numbers from memory). */
const LINE: GroupSurvey = {
  strategy: "job",
  samplesDb: [88.1, 86.1, 89.7, 86.5, 91.1, 86.7],
  effectiveMin: 450,
  instrument: "dosimeter",
};

describe("ISO 9612:2009 worked examples (from memory)", () => {
  test("Annex D: LEX 84.3 dB, U 2.7 dB", () => {
    const result = budget(WELDERS);
    expect(result.lexDb).toAgreeWithPrinted("84.3");
    // Recalled; the printed example rounds in between.
    expect(Math.abs(result.expandedDb - 2.7)).toBeLessThan(0.1);
  });

  test("Annex D, part by part by hand", () => {
    // Shares 0.281 and 0.714. u1a of grinding √(44.5/30) = 1.217: 0.869. Duration 4.343 · 0.714/90 · 30 = 1.034.
    const { items, dominant } = budget(WELDERS);
    const of = (source: string, taskId: string | null) =>
      items.find((item) => item.source === source && item.taskId === taskId)!.contributionDb;
    expect(of("sampling", "grinding")).toAgreeWithPrinted("0.870");
    expect(of("duration", "grinding")).toAgreeWithPrinted("1.03");
    expect(of("sampling", "welding")).toAgreeWithPrinted("0.22");
    // u3 = 1 over both: √(0.279² + 0.714²) = 0.767; u2 = 0.7 of that.
    expect(of("position", null)).toAgreeWithPrinted("0.77");
    expect(of("instrument", null)).toAgreeWithPrinted("0.54");
    expect(dominant).toMatchObject({ source: "duration", taskId: "grinding" });
    expect(items.reduce((sum, { sharePct }) => sum + sharePct, 0)).toBeCloseTo(100, 9);
  });

  test("Annex E: LEX,8h 88.2 dB from 88.4 dB over 7.5 h, u1 2.0 dB, U 3.8 dB", () => {
    const result = budget(LINE);
    // 88.44 less 10 lg(8/7.5) = 0.28.
    expect(result.lexDb).toAgreeWithPrinted("88.2");
    expect(result.scatterDb).toAgreeWithPrinted("2.0");
    // Table C.4 prints 1.4 for N = 6 and u1 = 2.0: 1.65 · √(1.4² + 1.5² + 1²) = 3.77; exactly 1.38, so 3.75.
    expect(Math.abs(result.expandedDb - 3.8)).toBeLessThan(0.1);
    expect(result.isScatterLarge).toBe(false);
    expect(result.dominant.source).toBe("instrument");
  });

  test("full days, by hand with Table C.4", () => {
    // 88, 91, 90, 89, 92: u1 = √(10/4) = 1.58; N = 5 gives 1.24: 1.65 · √(1.24² + 1.5² + 1²) = 3.61.
    const result = budget({
      strategy: "full-day",
      samplesDb: [88, 91, 90, 89, 92],
      effectiveMin: 480,
      instrument: "dosimeter",
    });
    expect(result.scatterDb).toAgreeWithPrinted("1.58");
    expect(Math.abs(result.expandedDb - 3.61)).toBeLessThan(0.02);
  });

  test("a scatter above 3.5 dB asks for another plan", () => {
    const wide = budget({ ...LINE, samplesDb: [80, 84, 88, 92, 96, 82] });
    expect(wide.isScatterLarge).toBe(true);
  });

  test("too few samples are no budget: two of a task, three of a job", () => {
    expect(budgetOfGroup({ ...LINE, samplesDb: [88, 89] })).toBe("too-few-samples");
    const [first] = WELDERS.strategy === "task" ? WELDERS.tasks : [];
    expect(budgetOfGroup({ strategy: "task", tasks: [{ ...first!, samplesDb: [88] }] })).toBe(
      "too-few-samples",
    );
    expect(budgetOfGroup({ strategy: "task", tasks: [] })).toBe("no-tasks");
  });
});

describe("uncertainty of a duration", () => {
  test("from observed durations (C.7) by hand: 60, 75, 90, 75 min", () => {
    // Squares 225 + 0 + 225 + 0 = 450 over 4 · 3: 37.5, root 6.12.
    expect(observedDurationUncertaintyMin([60, 75, 90, 75])).toAgreeWithPrinted("6.12");
    expect(observedDurationUncertaintyMin([60])).toBeNull();
  });

  test("from a range: half of it", () => {
    expect(durationRangeUncertaintyMin(60, 120)).toBe(30);
    expect(() => durationRangeUncertaintyMin(120, 60)).toThrow(RangeError);
  });
});

describe("what narrows a result most", () => {
  test("by hand in Annex D: the duration of grinding known twice as well", () => {
    const now = budget(WELDERS);
    const [first, ...others] = whatNarrowsMost(WELDERS);
    expect(first!.change).toEqual({
      kind: "duration",
      taskId: "grinding",
      durationUncertaintyMin: 15,
    });
    // u² loses three quarters of 1.034² = 0.80.
    expect(now.combinedDb ** 2 - (first!.expandedDb / 1.65) ** 2).toBeCloseTo(0.75 * 1.033 ** 2, 2);
    expect(first!.decreaseDb).toBeCloseTo(now.expandedDb - first!.expandedDb, 12);
    for (const [place, other] of others.entries())
      expect(other.decreaseDb).toBeLessThanOrEqual([first!, ...others][place]!.decreaseDb);
    // The class 1 meter is there already.
    expect(others.some(({ change }) => change.kind === "instrument")).toBe(false);
  });

  test("in Annex E: a class 1 instrument before three more samples", () => {
    const [first, second] = whatNarrowsMost(LINE);
    expect(first!.change).toEqual({ kind: "instrument", instrument: "class-1-meter" });
    expect(second!.change).toEqual({ kind: "more-samples", taskId: null, count: 3 });
    // Table C.4 (exact) for N = 9 and 2.0 dB: 0.95; u1 here 2.002.
    expect(Math.abs(second!.expandedDb - 1.65 * Math.sqrt(0.95 ** 2 + 1.5 ** 2 + 1))).toBeLessThan(
      0.01,
    );
  });

  test("one's own changes, and nothing where there is no budget", () => {
    expect(whatNarrowsMost(LINE, [{ kind: "instrument", instrument: "class-2-meter" }])).toEqual(
      [],
    );
    expect(whatNarrowsMost({ ...LINE, samplesDb: [88] })).toEqual([]);
    expect(surveyChanges(WELDERS)).toHaveLength(7);
  });
});

describe("a day on levels of a job", () => {
  const SAMPLES = [88.1, 86.1, 89.7, 86.5, 91.1, 86.7];
  const day = (fields: Partial<TaskLevel>) =>
    dayUncertainty(
      dayOf(
        buildTask(
          "line",
          450,
          buildLevel(88.44, { samplesDb: SAMPLES, instrument: "dosimeter", ...fields }),
        ),
      ),
    );

  test("carries the job's contribution: U as in Annex E", () => {
    for (const strategy of ["job", "full-day"] as const) {
      const { budget: ofDay } = day({ strategy });
      expect(ofDay!.expandedDb).toBeCloseTo(budget(LINE).expandedDb, 12);
    }
  });

  test("by tasks where nothing is said, and the same to the last bit", () => {
    expect(day({})).toEqual({ ...day({ strategy: "task" }) });
    // u1a: 2.00/√6 = 0.82.
    expect(Math.sqrt(day({}).budget!.samplingDb2)).toAgreeWithPrinted("0.82");
  });

  test("two samples are enough for a task, not for a job", () => {
    expect(day({ samplesDb: [88, 89] }).reason).toBeNull();
    expect(day({ samplesDb: [88, 89], strategy: "job" }).reason).toBe("too-few-samples");
  });
});
