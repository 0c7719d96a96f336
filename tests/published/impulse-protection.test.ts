import { describe, expect, test } from "vitest";
import { evaluateDay } from "../../shared/acoustics/day";
import { type ImpulseType, peakReduction } from "../../shared/acoustics/protection/impulse";
import type { Protection } from "../../shared/acoustics/types";
import {
  buildDay,
  buildLevel,
  buildProtection,
  buildProtector,
  buildReading,
  buildShift,
  buildTask,
  dayOf,
  ruleSet,
  settings,
} from "./build-day";

const EU = ruleSet("eu-2003-10-ec");
const UK = ruleSet("uk-2005");
const MUFF = buildProtection({ hDb: 31, mDb: 25, lDb: 17, snrDb: 28 });
const LAEQ_SETTINGS = { ...settings(3, null), criterionLevelDb: 85 };

const noise = (peakDb: number, impulseType: ImpulseType | null, weighting: "C" | "Z" = "C") =>
  buildLevel(95, { lcMinusLaDb: 1, impulseType, peak: { levelDb: peakDb, weighting } });
const peakOf = (
  level: ReturnType<typeof noise>,
  {
    rules = EU,
    protection = MUFF,
    wornPct = 100 as number | null,
  }: { rules?: typeof EU; protection?: Protection; wornPct?: number | null } = {},
) => {
  const task = buildTask("press", 480, level, { protection, wornPct });
  return evaluateDay(dayOf(task), rules, []).criteria.find(
    ({ criterionId }) => criterionId === "limit-peak",
  )!;
};

describe("EN 458, modified SNR approach (from memory): L − 5, M − 5 or H by the type of noise", () => {
  test.each([
    [1, 12],
    [2, 20],
    [3, 31],
  ] as const)("type %d: 31/25/17 takes %d dB off a C-weighted peak", (type, reductionDb) => {
    expect(peakReduction(noise(150, type), MUFF, EU.protection)).toMatchObject({
      type,
      reductionDb,
    });
    expect(peakOf(noise(150, type))).toMatchObject({
      levelDb: 150 - reductionDb,
      verdict: "under",
      reason: null,
    });
  });

  test("over where even so the ear gets more than 140 dB", () => {
    expect(peakOf(noise(152.1, 1))).toMatchObject({ verdict: "over" });
    expect(peakOf(noise(152, 1))).toMatchObject({ verdict: "under", levelDb: 140 });
  });

  test("the UK's allowance of 4 dB comes off here as it does of levels", () => {
    expect(peakOf(noise(150, 2), { rules: UK }).levelDb).toBe(150 - (25 - 5 - 4));
  });

  test("never adds: a low L gives nothing and says that it was clamped", () => {
    const weak = buildProtection({ hDb: 15, mDb: 9, lDb: 4 });
    expect(peakReduction(noise(150, 1), weak, EU.protection)).toMatchObject({
      reductionDb: 0,
      wasClamped: true,
    });
  });
});

describe("what stays open", () => {
  test.each([
    ["no type", noise(150, null), {}, "peak-at-ear-not-assessed"],
    ["another weighting", noise(150, 2, "Z"), {}, "peak-weighting"],
    [
      "no H, M, L",
      noise(150, 2),
      { protection: buildProtection({ snrDb: 28 }) },
      "peak-at-ear-not-assessed",
    ],
    ["not worn all the time", noise(150, 2), { wornPct: 95 }, "worn-in-part"],
    ["wearing not known", noise(150, 2), { wornPct: null }, "wearing-unknown"],
  ] as const)("%s", (_what, level, fields, reason) => {
    expect(peakOf(level, fields)).toMatchObject({ verdict: "not-assessed", reason, levelDb: null });
  });

  test("worn in part is over where even the worn part is, and under where even the bare one is", () => {
    expect(peakOf(noise(165, 2), { wornPct: 95 })).toMatchObject({ verdict: "over", levelDb: 145 });
    expect(peakOf(noise(139, 2), { wornPct: 95 })).toMatchObject({
      verdict: "under",
      levelDb: 139,
    });
  });

  test("without protection nothing is credited", () => {
    const task = buildTask("press", 480, noise(150, 2), { protection: MUFF, wornPct: 100 });
    const { criteria } = evaluateDay(dayOf(task), EU, []);
    for (const { judged, levelDb, criterionId } of criteria)
      if (judged === "without-protection" && criterionId.endsWith("peak"))
        expect(levelDb).toBe(150);
  });
});

test("the active part is never credited", () => {
  const active = {
    attenuationDb: [20, 20, 20, 20, 0, 0, 0, 0] as const,
    delayS: null,
    gain: null,
    maximumDb: null,
    bandwidthHz: null,
    saturatesAboveDb: null,
    batteryMin: null,
  };
  const inner = buildProtector({ hDb: 31, mDb: 25, lDb: 17, kind: "active-earmuff", active });
  const protection = { ...buildProtection({}, { inner }), activeCheckPassed: true };
  expect(peakOf(noise(150, 1), { protection }).levelDb).toBe(138);
});

test("two together by H, M, L of their test data", () => {
  const flat = [30, 30, 30, 30, 30, 30, 30, 30] as const;
  const two = buildProtection(
    {},
    {
      outer: buildProtector({ modelId: "outer" }),
      combinationBands: { meanDb: flat, sdDb: [0, 0, 0, 0, 0, 0, 0, 0] },
    },
  );
  // Flat 30: M is 30 but for the table's own rounding.
  expect(peakOf(noise(160, 2), { protection: two }).levelDb).toBeCloseTo(135, 0);
  expect(peakOf(noise(160, 2), { protection: { ...two, combinationBands: null } }).reason).toBe(
    "peak-at-ear-not-assessed",
  );
});

describe("a reading's peak over the shift", () => {
  const reading = buildReading(LAEQ_SETTINGS, {
    averageDb: 95,
    peak: { levelDb: 150, weighting: "C" },
  });
  const dayWith = (...types: (ImpulseType | null)[]) =>
    buildDay([
      buildShift(
        480,
        types.map((type, index) =>
          buildTask(`t${index}`, 480 / types.length, noise(120, type), {
            protection: MUFF,
            wornPct: 100,
          }),
        ),
        { readings: [reading] },
      ),
    ]);
  const resultOf = (day: ReturnType<typeof dayWith>) =>
    evaluateDay(day, EU, []).criteria.find(({ criterionId }) => criterionId === "limit-peak")!;

  test("may have come in any task: the least of them is taken off", () => {
    expect(resultOf(dayWith(3, 2))).toMatchObject({ levelDb: 130, verdict: "under" });
  });

  test("not assessed where one task says nothing of its impulses, or some time says nothing", () => {
    expect(resultOf(dayWith(3, null)).verdict).toBe("not-assessed");
    const short = dayWith(3, 2);
    const longer = { ...short, shifts: [{ ...short.shifts[0]!, lengthMin: 500 }] };
    expect(resultOf(longer).verdict).toBe("not-assessed");
  });
});
