import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { dosePct } from "../../shared/acoustics/dose";
import { laeqDb } from "../../shared/acoustics/exposure";
import {
  type ChannelKind,
  countedSamples,
  type DoseSettings,
  distribution,
  envelope,
  evaluateHistory,
  type HistoryChannel,
  MISSING,
  percentiles,
  runningDose,
  type Stretch,
} from "../../shared/acoustics/history";
import "../setup/printed";

/**
 * The evaluation of a time history against closed forms, hand sums and the definition. Numbers are computed by the named
 * formula unless a document is named.
 */

const ACTION: DoseSettings = { criterionLevelDb: 90, exchangeRateDb: 5, thresholdDb: 80 };
const LIMIT: DoseSettings = { criterionLevelDb: 90, exchangeRateDb: 5, thresholdDb: 90 };
const FIVE: DoseSettings = { criterionLevelDb: 90, exchangeRateDb: 5, thresholdDb: null };
const FOUR: DoseSettings = { criterionLevelDb: 85, exchangeRateDb: 4, thresholdDb: 80 };
const ENERGY: DoseSettings = { criterionLevelDb: 85, exchangeRateDb: 3, thresholdDb: null };
const THREE_80: DoseSettings = { criterionLevelDb: 85, exchangeRateDb: 3, thresholdDb: 80 };
const ALL = [ACTION, LIMIT, FIVE, FOUR, ENERGY, THREE_80];

const channel = (kind: ChannelKind, levelsDb: readonly (number | null)[]): HistoryChannel => ({
  kind,
  levels: Int16Array.from(levelsDb, (db) => (db === null ? MISSING : Math.round(100 * db))),
});
const steady = (kind: ChannelKind, levelDb: number, count: number) =>
  channel(kind, new Array<number>(count).fill(levelDb));
const task = (fromIndex: number, toIndex: number, id = "t"): Stretch => ({
  id,
  kind: "task",
  fromIndex,
  toIndex,
});
const leftOut = (fromIndex: number, toIndex: number): Stretch => ({
  id: "out",
  kind: "left-out",
  fromIndex,
  toIndex,
});
const near = (received: number | null | undefined, expected: number, share = 1e-9) =>
  expect(Math.abs(received! - expected)).toBeLessThanOrEqual(share * Math.max(1, expected));

describe("a steady history equals the closed form", () => {
  test.each([
    [90, 28_800, 1],
    [85, 28_800, 1],
    [100, 14_400, 1],
    [93.7, 9_600, 0.5],
    [110, 14_400, 0.125],
  ])("%d dB, %d values", (levelDb, count, intervalS) => {
    const durationMin = (count * intervalS) / 60;
    const history = [steady("las", levelDb, count), steady("laeq", levelDb, count)];
    const { counted } = evaluateHistory(history, intervalS, [], ALL);
    near(counted.laeq?.levelDb, levelDb);
    expect(counted.maxSlow).toMatchObject({ levelDb, bound: "exact", from: "las" });
    for (const [place, settings] of ALL.entries()) {
      const figure = counted.doses[place]!;
      // By energy, 10^((L − Lc)/10); under an exchange rate, 2^((L − Lc)/q).
      const closed =
        settings === ENERGY
          ? (100 * durationMin * 10 ** ((levelDb - 85) / 10)) / 480
          : dosePct([{ levelDb, durationMin }], { ...settings, referenceMin: 480 });
      near(figure.dosePct, closed);
      expect(figure.bound).toBe("exact");
      expect(figure.from).toBe(settings === ENERGY ? "laeq" : "las");
      if (figure.dosePct > 0) near(figure.averageDb, levelDb);
      else expect(figure.averageDb).toBeNull();
    }
  });

  test("from LAeq alone the bound of steady noise is the dose itself, but for the detector's first second", () => {
    const { counted } = evaluateHistory([steady("laeq", 95, 28_800)], 1, [], [FIVE, ACTION]);
    const exact = dosePct([{ levelDb: 95, durationMin: 480 }], { ...FIVE, referenceMin: 480 });
    for (const figure of counted.doses) {
      expect(figure).toMatchObject({ bound: "upper", from: "laeq" });
      near(figure!.dosePct, exact, 1 / 28_800);
    }
  });
});

describe("2003/10/EC art. 2(b) and ISO 1999: a dose by energy says what LEX,8h says", () => {
  const against = (criterionLevelDb: number): DoseSettings => ({ ...ENERGY, criterionLevelDb });

  test.each([80, 85, 87])("8 h at %d dB are 100 % of it, neither more nor less", (levelDb) => {
    const { counted } = evaluateHistory(
      [steady("laeq", levelDb, 28_800)],
      1,
      [],
      [against(levelDb)],
    );
    expect(counted.doses[0]!.dosePct).toBeCloseTo(100, 10);
    expect(counted.doses[0]!.averageDb).toBeCloseTo(levelDb, 10);
  });

  // 100 · 10^((95.6936 − Lc)/10), of 0.64 · 8 h at 95.69 dB and 0.36 · 8 h at 95.70 dB.
  test.each([
    [85, "1173.2"],
    [80, "3709.9"],
    [87, "740.2"],
  ])("8 h of LAeq 95.694 dB against %d dB: %s %%", (levelDb, printed) => {
    const values = Array.from({ length: 28_800 }, (_, at) => (at < 18_432 ? 95.69 : 95.7));
    const history = [channel("laeq", values)];
    const { counted } = evaluateHistory(history, 1, [], [against(levelDb)]);
    expect(counted.laeq?.levelDb).toAgreeWithPrinted("95.694");
    const [figure] = counted.doses;
    expect(figure?.dosePct).toAgreeWithPrinted(printed);
    near(figure?.averageDb, counted.laeq!.levelDb);
    const running = runningDose(history, 1, [], [against(levelDb)], 10);
    near(running.doses[0]!.dosesPct.at(-1)!, figure!.dosePct);
  });

  test("from slow levels alone the least dose is that of the least energy", () => {
    const history = [channel("las", [70, 90, 95, 85, 80, 60, 100])];
    const { counted } = evaluateHistory(history, 1, [], [ENERGY]);
    const { levelDb, durationS } = counted.laeq!;
    expect(counted.doses[0]).toMatchObject({ bound: "lower", from: "las" });
    near(counted.doses[0]!.dosePct, (100 * durationS * 10 ** ((levelDb - 85) / 10)) / 28_800);
  });
});

describe("29 CFR 1910.95 Table G-16 and steps, by hand sums", () => {
  test("2 h at 100, 4 h at 95 and 2 h at 80 dB: 100 + 100 + 6.25 %", () => {
    const levels = [
      ...new Array<number>(7_200).fill(100),
      ...new Array<number>(14_400).fill(95),
      ...new Array<number>(7_200).fill(80),
    ];
    const { counted } = evaluateHistory([channel("las", levels)], 1, [], [ACTION, LIMIT]);
    expect(counted.doses[0]!.dosePct).toAgreeWithPrinted("206.25");
    expect(counted.doses[1]!.dosePct).toAgreeWithPrinted("200.00");
  });

  test("a level equal to the threshold counts, a hundredth below does not", () => {
    const at = evaluateHistory([steady("las", 90, 3_600)], 1, [], [LIMIT]).counted.doses[0]!;
    expect(at.dosePct).toAgreeWithPrinted("12.5");
    const below = evaluateHistory([steady("las", 89.99, 3_600)], 1, [], [LIMIT]).counted.doses[0]!;
    expect(below).toMatchObject({ dosePct: 0, averageDb: null, bound: "exact" });
    const odd = { ...LIMIT, thresholdDb: 80.1 };
    expect(
      evaluateHistory([steady("las", 80.1, 60)], 1, [], [odd]).counted.doses[0]!.dosePct,
    ).toBeGreaterThan(0);
  });
});

describe("105 dB for 10 % of 8 h and 70 dB for the rest (the trap of a 5 dB rule)", () => {
  const levels = [...new Array<number>(2_880).fill(105), ...new Array<number>(25_920).fill(70)];

  test("LAeq is 95.0, which read as steady would be 200 %; the true dose is 80 %", () => {
    const history = [channel("laeq", levels), channel("las", levels)];
    const { counted } = evaluateHistory(history, 1, [], [ACTION]);
    expect(counted.laeq!.levelDb).toAgreeWithPrinted("95.0");
    const byLaeq = { levelDb: counted.laeq!.levelDb, durationMin: 480 };
    expect(dosePct([byLaeq], { ...ACTION, referenceMin: 480 })).toAgreeWithPrinted("200");
    expect(counted.doses[0]!.dosePct).toAgreeWithPrinted("80");
    expect(counted.doses[0]!.bound).toBe("exact");
  });

  test("LAeq every second proves less than 81 %", () => {
    const { counted } = evaluateHistory([channel("laeq", levels)], 1, [], [ACTION]);
    expect(counted.doses[0]!.bound).toBe("upper");
    expect(counted.doses[0]!.dosePct).toBeGreaterThanOrEqual(80);
    expect(counted.doses[0]!.dosePct).toBeLessThan(81);
  });

  test("LAeq of a minute each proves less than 90 %", () => {
    const minutes = [...new Array<number>(48).fill(105), ...new Array<number>(432).fill(70)];
    const { counted } = evaluateHistory([channel("laeq", minutes)], 60, [], [ACTION]);
    expect(counted.doses[0]!.dosePct).toBeGreaterThanOrEqual(80);
    expect(counted.doses[0]!.dosePct).toBeLessThan(90);
  });
});

const levelDb = fc.integer({ min: 5_000, max: 12_500 }).map((level) => level / 100);
const levels = fc.array(fc.option(levelDb, { nil: null, freq: 12 }), {
  minLength: 2,
  maxLength: 300,
});

describe("properties of the exact figures", () => {
  test("cut anywhere and joined gives the same, and tasks add up to the whole", () => {
    fc.assert(
      fc.property(levels, fc.double({ min: 0, max: 1, noNaN: true }), (values, where) => {
        const cut = Math.floor(where * values.length);
        const history = (part: readonly (number | null)[]) => [
          channel("las", part),
          channel("laeq", part),
        ];
        const both = [task(0, cut, "a"), task(cut, values.length, "b")];
        const whole = evaluateHistory(history(values), 1, both, ALL);
        const parts = [values.slice(0, cut), values.slice(cut)]
          .filter((part) => part.length > 0)
          .map((part) => evaluateHistory(history(part), 1, [], ALL).counted);
        const sum = (of: (part: (typeof parts)[0]) => number) =>
          parts.reduce((total, part) => total + of(part), 0);
        for (const place of ALL.keys()) {
          const dose = whole.counted.doses[place]?.dosePct ?? 0;
          near(
            sum((part) => part.doses[place]?.dosePct ?? 0),
            dose,
            1e-12,
          );
          const byTask = whole.stretches.map((one) => one.doses[place]?.dosePct ?? 0);
          near(byTask[0]! + byTask[1]!, dose, 1e-12);
        }
        if (whole.counted.laeq === null) return;
        const joined = parts.flatMap(({ laeq }) =>
          laeq ? [{ levelDb: laeq.levelDb, durationMin: laeq.durationS / 60 }] : [],
        );
        near(whole.counted.laeq.levelDb, laeqDb(joined), 1e-12);
        near(
          whole.stretches.reduce((total, one) => total + (one.energySharePct ?? 0), 0),
          100,
          1e-9,
        );
      }),
    );
  });

  test("equals the rule's own sum over single seconds", () => {
    fc.assert(
      fc.property(levels, (values) => {
        const { counted } = evaluateHistory([channel("las", values)], 1, [], [ACTION, FOUR]);
        const parts = values.flatMap((db) =>
          db === null ? [] : [{ levelDb: db, durationMin: 1 / 60 }],
        );
        if (parts.length === 0) return;
        near(counted.doses[0]!.dosePct, dosePct(parts, { ...ACTION, referenceMin: 480 }), 1e-10);
        near(counted.doses[1]!.dosePct, dosePct(parts, { ...FOUR, referenceMin: 480 }), 1e-10);
      }),
    );
  });
});

describe("what is left out, and what is missing", () => {
  const values = [90, 90, 120, 120, null, 90, 90, 90];
  const history = [channel("las", values), channel("laeq", values), channel("lcpeak", values)];

  test("results with and without stand side by side", () => {
    const { counted, everything, leftOutS, stretches } = evaluateHistory(
      history,
      1,
      [leftOut(2, 4), task(0, 6)],
      [FIVE],
    );
    expect(leftOutS).toBe(2);
    expect(counted).toMatchObject({ sampleCount: 6, durationS: 5, missingS: 1 });
    near(counted.laeq!.levelDb, 90);
    near(everything.laeq!.levelDb, 10 * Math.log10((5 * 1e9 + 2 * 1e12) / 7));
    expect(counted.maxSlow!.levelDb).toBe(90);
    expect(everything.maxSlow!.levelDb).toBe(120);
    expect(counted.peaks).toEqual([{ levelDb: 90, weighting: "C", from: "lcpeak" }]);
    expect(everything.peaks[0]!.levelDb).toBe(120);
    expect(stretches[0]).toMatchObject({ kind: "left-out", durationS: 2, energySharePct: null });
    expect(stretches[0]!.laeq!.levelDb).toBeCloseTo(120, 9);
    expect(stretches[1]).toMatchObject({ kind: "task", durationS: 3 });
    near(stretches[1]!.energySharePct!, 60);
  });

  test("a history without a value says nothing, which is not 0 dB", () => {
    const { counted } = evaluateHistory([channel("las", [null, null])], 1, [], [FIVE]);
    expect(counted).toMatchObject({ laeq: null, maxSlow: null, durationS: 0, missingS: 2 });
    expect(counted.doses).toEqual([null]);
  });

  test("what makes no history is refused", () => {
    const las = steady("las", 80, 4);
    expect(() => evaluateHistory([], 1, [], [])).toThrow(RangeError);
    expect(() => evaluateHistory([las, las], 1, [], [])).toThrow(RangeError);
    expect(() => evaluateHistory([las, steady("laeq", 80, 5)], 1, [], [])).toThrow(RangeError);
    expect(() => evaluateHistory([las], 0.1, [], [])).toThrow(RangeError);
    expect(() => evaluateHistory([las], 61, [], [])).toThrow(RangeError);
    expect(() => evaluateHistory([las], 1, [task(2, 5)], [])).toThrow(RangeError);
  });
});

describe("channels and what they can say", () => {
  const of = (kinds: readonly ChannelKind[], intervalS: number, settings: DoseSettings) => {
    const { counted } = evaluateHistory(
      kinds.map((kind) => steady(kind, 92, 60)),
      intervalS,
      [],
      [settings],
    );
    const dose = counted.doses[0];
    return dose ? [dose.bound, dose.from] : null;
  };

  test.each([
    [["laeq"], 1, ENERGY, ["exact", "laeq"]],
    [["laeq", "las"], 60, ENERGY, ["exact", "laeq"]],
    [["las"], 1, ENERGY, ["lower", "las"]],
    [["las"], 1, THREE_80, ["exact", "las"]],
    [["laeq"], 1, THREE_80, ["upper", "laeq"]],
    [["las"], 1, FIVE, ["exact", "las"]],
    [["las"], 2, FIVE, ["lower", "las"]],
    [["las", "las-max"], 2, FIVE, ["upper", "las-max"]],
    [["laeq", "las"], 2, ACTION, ["upper", "laeq"]],
    [["lceq", "lcpeak"], 1, ACTION, null],
  ] as const)("%j every %d s under %j: %j", (kinds, intervalS, settings, expected) => {
    expect(of(kinds, intervalS, settings)).toEqual(expected);
  });

  test("LCeq and the greatest slow level have channels of their own", () => {
    const { counted } = evaluateHistory(
      [channel("lceq", [90, 100]), channel("las-max", [91, 93]), channel("zpeak", [120, 131])],
      10,
      [],
      [],
    );
    near(counted.lceq!.levelDb, 10 * Math.log10((1e9 + 1e10) / 2));
    expect(counted.maxSlow).toMatchObject({ levelDb: 93, bound: "exact", from: "las-max" });
    expect(counted.peaks).toEqual([{ levelDb: 131, weighting: "Z", from: "zpeak" }]);
    expect(counted.laeq).toBeNull();
  });
});

describe("running dose", () => {
  test("never falls and ends at the counted dose, from any channel", () => {
    const kinds = fc.constantFrom<ChannelKind[]>(["las"], ["laeq"], ["las-max"], ["las", "laeq"]);
    fc.assert(
      fc.property(
        levels,
        kinds,
        fc.constantFrom(0.125, 1, 5),
        fc.integer({ min: 1, max: 40 }),
        (values, of, intervalS, points) => {
          const history = of.map((kind) => channel(kind, values));
          const stretches = [leftOut(1, Math.ceil(values.length / 3))];
          const { counted } = evaluateHistory(history, intervalS, stretches, ALL);
          const { endsS, doses } = runningDose(history, intervalS, stretches, ALL, points);
          expect(endsS.at(-1)).toBeCloseTo(values.length * intervalS, 9);
          for (const [place, running] of doses.entries()) {
            const figure = counted.doses[place]!;
            if (running === null) {
              expect(figure).toBeNull();
              continue;
            }
            near(running.dosesPct.at(-1)!, figure.dosePct, 1e-9);
            expect([running.bound, running.from]).toEqual([figure.bound, figure.from]);
            for (let point = 1; point < running.dosesPct.length; point++)
              expect(running.dosesPct[point]!).toBeGreaterThanOrEqual(running.dosesPct[point - 1]!);
          }
        },
      ),
      { numRuns: 60 },
    );
  });

  test("by hand: 95 dB for an hour, then an hour left out, then 90 dB for an hour", () => {
    const values = [95, 90, 90].flatMap((db) => new Array<number>(3_600).fill(db));
    const { endsS, doses } = runningDose(
      [channel("las", values)],
      1,
      [leftOut(3_600, 7_200)],
      [ACTION],
      3,
    );
    expect([...endsS]).toEqual([3_600, 7_200, 10_800]);
    expect(doses[0]!.dosesPct[0]).toAgreeWithPrinted("25.0");
    expect(doses[0]!.dosesPct[1]).toAgreeWithPrinted("25.0");
    expect(doses[0]!.dosesPct[2]).toAgreeWithPrinted("37.5");
  });
});

describe("percentiles, distribution, envelope", () => {
  const { levels: ramp } = channel(
    "las",
    Array.from({ length: 100 }, (_, place) => 60 + place / 10),
  );
  const all = countedSamples(100, []);

  test("L10, L50 and L90 of 100 evenly rising levels", () => {
    // Ten of a hundred are 69.0 dB or more, fifty 65.0, ninety 61.0.
    expect(percentiles(ramp, all, [10, 50, 90, 100])).toEqual([69, 65, 61, 60]);
    const onlyLow = countedSamples(100, [leftOut(50, 100)]);
    expect(percentiles(ramp, onlyLow, [10])).toEqual([64.5]);
    expect(percentiles(channel("las", [null]).levels, countedSamples(1, []), [10])).toBeNull();
    expect(() => percentiles(ramp, all, [0])).toThrow(RangeError);
  });

  test("classes of 1 dB hold every sample", () => {
    const classes = distribution(ramp, all);
    expect(classes.map(({ fromDb }) => fromDb)).toEqual([60, 61, 62, 63, 64, 65, 66, 67, 68, 69]);
    expect(classes.every(({ count, sharePct }) => count === 10 && sharePct === 10)).toBe(true);
    expect(distribution(channel("las", [-0.5, 0.5]).levels, countedSamples(2, []))).toEqual([
      { fromDb: -1, count: 1, sharePct: 50 },
      { fromDb: 0, count: 1, sharePct: 50 },
    ]);
  });

  test("an envelope holds every level, and a gap stays a gap", () => {
    const { levels: gappy } = channel("las", [80, null, null, null, 70, 90, 75]);
    const { edges, lowest, highest } = envelope(gappy, 3);
    expect([...edges]).toEqual([0, 3, 5, 7]);
    expect([...lowest]).toEqual([8_000, 7_000, 7_500]);
    expect([...highest]).toEqual([8_000, 7_000, 9_000]);
    expect([...envelope(gappy, 1, 1, 4).lowest]).toEqual([MISSING]);
    expect(envelope(gappy, 100).lowest).toEqual(gappy);
    expect(envelope(gappy, 2, 4, 6).highest).toEqual(Int16Array.of(7_000, 9_000));
  });
});
