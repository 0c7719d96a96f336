import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { evaluateDay } from "../../shared/acoustics/day";
import { type ExchangeLaw, lawOf, weightOf } from "../../shared/acoustics/exchange-law";
import { mostAudioDb } from "../../shared/acoustics/protection/most-audio";
import {
  audioLaw,
  withAudioDb,
  withAudioWeight,
} from "../../shared/acoustics/protection/programme-audio";
import type { DayInput, LevelMetric, Protection } from "../../shared/acoustics/types";
import {
  buildDay,
  buildLevel,
  buildProtection,
  buildProtector,
  buildReading,
  buildShift,
  buildTask,
  dayOf,
  LAEQ,
  lavg5,
  ruleSet,
  STEADY,
  settings,
} from "./build-day";

const EU = ruleSet("eu-2003-10-ec");
const US = ruleSet("us-general-industry");
/** Takes 25 dB off an A-weighted level whose LC − LA is 0. */
const muff = (audioDb: number | null, fields: Partial<Protection> = {}) =>
  buildProtection({ snrDb: 25 }, { audioDb, ...fields });
const eightHours = (levelDb: number, protection: Protection, wornPct: number | null = 100) =>
  dayOf(buildTask("mill", 480, buildLevel(levelDb, { lcMinusLaDb: 0 }), { protection, wornPct }));
const atEar = (day: DayInput, rules = EU) => evaluateDay(day, rules, []).atEarDb;

describe("by energy (computed)", () => {
  test.each([
    [80, 80, 83.0103],
    [70, 80, 80.4139],
    [80, 60, 80.0432],
    [80, null, 80],
  ])("%d dB of noise and %s dB of radio: %d", (noiseDb, audioDb, sumDb) => {
    expect(withAudioDb(noiseDb, audioDb)).toBeCloseTo(sumDb, 4);
  });

  test("in the day: 105 dB outside, 80 left, 80 of radio", () => {
    const { tasks, atEarDb } = evaluateDay(eightHours(105, muff(80)), EU, []);
    expect(atEarDb).toBeCloseTo(83.0103, 4);
    expect(tasks[0]).toMatchObject({ audio: { levelDb: 80, noiseDb: 80, noiseActiveDb: null } });
    expect(tasks[0]!.wornDb).toBeCloseTo(83.0103, 4);
    // What a method leaves is of the noise alone.
    expect(tasks[0]!.methods[0]!.atEarDb).toBe(80);
  });

  test("beside an average of 5 dB the level while worn is bounded: 80 left, 78 of radio", () => {
    const level = buildLevel(98, { metric: lavg5(80) });
    const protection = buildProtection({ usRatingDb: 25 }, { audioDb: 78 });
    const { tasks } = evaluateDay(
      dayOf(buildTask("mill", 480, level, { protection, wornPct: 100 })),
      US,
      [],
    );
    // By energy the least; the two weights added, 5·log2(2^16 + 2^15.6), the most.
    expect(tasks[0]!.wornRangeDb!.leastDb).toBeCloseTo(82.1244, 4);
    expect(tasks[0]!.wornRangeDb!.mostDb).toBeCloseTo(84.0691, 4);
  });

  test("only while worn: 75 % of 105 dB and 80 of radio, the rest bare", () => {
    const byHand = 10 * Math.log10(0.75 * (1e8 + 1e8) + 0.25 * 10 ** 10.5);
    expect(atEar(eightHours(105, muff(80), 75))).toBeCloseTo(byHand, 9);
  });

  test("a task without a programme is as it was, to the last bit", () => {
    expect(evaluateDay(eightHours(105, muff(null), 90), EU, [])).toEqual(
      evaluateDay(eightHours(105, buildProtection({ snrDb: 25 }), 90), EU, []),
    );
  });

  test("bare tasks have none: it is under the cup only", () => {
    const quiet = eightHours(75, muff(82));
    expect(atEar(quiet)).toBeCloseTo(75, 9);
  });

  test("too little by the radio alone: 70 left, 87 with the programme", () => {
    const { tasks } = evaluateDay(eightHours(95, muff(87)), EU, []);
    expect(evaluateDay(eightHours(95, muff(null)), EU, []).tasks[0]!.word).toBe("strong-side");
    expect(tasks[0]!.word).toBe("too-little");
  });

  test("it may raise the level over the bare one, and only with a programme", () => {
    expect(atEar(eightHours(90, muff(95)))!).toBeGreaterThan(90);
    fc.assert(
      fc.property(
        fc.double({ min: 86, max: 118, noNaN: true }),
        fc.double({ min: 50, max: 110, noNaN: true }),
        fc.integer({ min: 0, max: 100 }),
        (db, audioDb, wornPct) => {
          const bareDb = atEar(eightHours(db, muff(null), 0))!;
          const withDb = atEar(eightHours(db, muff(audioDb), wornPct))!;
          if (withDb > bareDb + 1e-9) expect(withAudioDb(db - 25, audioDb)).toBeGreaterThan(db);
        },
      ),
    );
  });

  test("more of it never lowers the day", () => {
    fc.assert(
      fc.property(
        fc.double({ min: 86, max: 118, noNaN: true }),
        fc.double({ min: 40, max: 110, noNaN: true }),
        fc.double({ min: 0, max: 20, noNaN: true }),
        fc.constantFrom(EU, US),
        (db, audioDb, moreDb, rules) => {
          const day = (audio: number) =>
            eightHours(db, buildProtection({ snrDb: 25, usRatingDb: 25 }, { audioDb: audio }), 90);
          const [less, more] = [audioDb, audioDb + moreDb].map((audio) =>
            evaluateDay(day(audio), rules, []),
          );
          // Of a day that is only bounded the end that decides is given: another end says nothing of more or less.
          if (less!.atEarBound !== more!.atEarBound) return;
          expect(more!.atEarDb!).toBeGreaterThanOrEqual(less!.atEarDb! - 1e-9);
        },
      ),
    );
  });
});

describe("active part off and on, and the battery", () => {
  const flat = (db: number) => [db, db, db, db, db, db, db, db] as const;
  const inner = buildProtector({
    kind: "active-earmuff",
    bands: { meanDb: flat(20), sdDb: flat(0) },
    active: {
      attenuationDb: flat(10),
      delayS: null,
      gain: null,
      maximumDb: null,
      bandwidthHz: null,
      saturatesAboveDb: null,
      batteryMin: 240,
    },
  });
  const level = buildLevel(100, { octaveBandsDb: [null, 95, 95, 95, 95, 95, 95, 95] });
  const day = dayOf(
    buildTask("cell", 480, level, {
      protection: buildProtection({}, { inner, audioDb: 75 }),
      wornPct: 100,
    }),
  );

  test("each adds by energy: 80 and 75 off, 70 and 75 on, half a day of each as worked (computed)", () => {
    const { atEarDb, atEarActiveDb, atEarAsWorkedDb } = evaluateDay(day, EU, []);
    const off = 1e8 + 10 ** 7.5;
    const on = 1e7 + 10 ** 7.5;
    expect(atEarDb).toBeCloseTo(10 * Math.log10(off), 9);
    expect(atEarActiveDb).toBeCloseTo(10 * Math.log10(on), 9);
    expect(atEarAsWorkedDb).toBeCloseTo(10 * Math.log10((off + on) / 2), 9);
  });
});

describe("under an exchange rate of 5 dB", () => {
  const rated = (audioDb: number, metric: LevelMetric) =>
    evaluateDay(
      dayOf(
        buildTask("mill", 480, buildLevel(100, { metric }), {
          protection: buildProtection({ usRatingDb: 29 }, { audioDb }),
          wornPct: 100,
        }),
      ),
      US,
      [],
    );

  test("a steady level: 78 left of 100, 78 of radio, 81.0 by energy, and so the TWA (computed)", () => {
    expect(rated(78, STEADY)).toMatchObject({ atEarBound: "exact" });
    expect(rated(78, STEADY).atEarDb).toBeCloseTo(78 + 10 * Math.log10(2), 9);
  });

  test("an average at 5 dB only bounds the sum: 81.0 at least, 83.0 at most (two equal weights are 5 dB)", () => {
    const { atEarBound, atEarDb, word } = rated(78, lavg5(80));
    expect(atEarBound).toBe("upper");
    expect(atEarDb).toBeCloseTo(83, 9);
    expect(word).toBe("enough");
  });

  test("property: the true mean of an unsteady noise with a programme lies between its bounds", () => {
    const law: ExchangeLaw = { ...lawOf(US.criteria[0]!), thresholdDb: null, table: null };
    const rate = { energy: 10 * Math.log10(2), five: 5 };
    const meanOf = (levels: readonly number[], q: number) =>
      q * Math.log2(levels.reduce((sum, db) => sum + 2 ** (db / q), 0) / levels.length);
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: 55, max: 100, noNaN: true }), { minLength: 1, maxLength: 8 }),
        fc.double({ min: 55, max: 95, noNaN: true }),
        (levels, audioDb) => {
          const trueWeight =
            levels.reduce((sum, db) => sum + weightOf(withAudioDb(db, audioDb), law), 0) /
            levels.length;
          const cases = [
            [lavg5(null), meanOf(levels, rate.five), ["least", "most"]],
            [LAEQ, meanOf(levels, rate.energy), ["most"]],
          ] as const;
          for (const [metric, meanDb, ends] of cases) {
            const audio = audioLaw(audioDb, buildLevel(90, { metric }), law, false);
            for (const end of ends) {
              const bound = withAudioWeight(weightOf(meanDb, law), audio, end);
              const slack = 1e-9 * trueWeight;
              if (end === "least") expect(bound).toBeLessThanOrEqual(trueWeight + slack);
              else expect(bound).toBeGreaterThanOrEqual(trueWeight - slack);
            }
          }
        },
      ),
      { numRuns: 300 },
    );
  });
});

test("a reading's factor is on the noise and not on the programme (computed)", () => {
  const task = buildTask("mill", 480, buildLevel(100, { lcMinusLaDb: 0 }), {
    protection: muff(80),
    wornPct: 100,
  });
  const reading = buildReading(settings(3, null), { averageDb: 105 });
  const day = buildDay([buildShift(480, [task], { readings: [reading] })]);
  // 105 by the reading: 80 left of it, and 80 of radio.
  expect(atEar(day)).toBeCloseTo(83.0103, 4);
});

test("wearing not known: between always with the programme and never", () => {
  const { atEarBound, atEarDb, criteria } = evaluateDay(eightHours(105, muff(80), null), EU, []);
  expect(atEarBound).toBe("lower");
  expect(atEarDb).toBeCloseTo(83.0103, 4);
  expect(criteria.find(({ criterionId }) => criterionId === "limit")).toMatchObject({
    verdict: "not-assessed",
    reason: "wearing-unknown",
  });
});

describe("how loud it may be", () => {
  test("80 left for 8 h against 87: 10 lg(10^8.7 − 10^8) = 86.03 (computed)", () => {
    expect(mostAudioDb(eightHours(105, muff(null)), EU, 87)).toBeCloseTo(86.0335, 3);
  });

  test("over the worn time only: 88 outside, 63 left, worn 75 % (computed)", () => {
    const byHand = 10 * Math.log10((10 ** 8.7 - 0.25 * 10 ** 8.8) / 0.75 - 10 ** 6.3);
    expect(mostAudioDb(eightHours(88, muff(null), 75), EU, 87)).toBeCloseTo(byHand, 6);
  });

  test("what is on record is left aside", () => {
    expect(mostAudioDb(eightHours(105, muff(95)), EU, 87)).toBeCloseTo(86.0335, 3);
  });

  test.each([
    ["past it already", eightHours(115, muff(null)), EU],
    ["worn never", eightHours(86, muff(null), 0), EU],
    ["no protector", dayOf(buildTask("yard", 480, buildLevel(86))), EU],
    ["wearing not known", eightHours(105, muff(null), null), EU],
  ])("null: %s", (_why, day, rules) => {
    expect(mostAudioDb(day, rules, 87)).toBeNull();
  });

  test("property: at that level the day just keeps the limit, at 5 dB too", () => {
    fc.assert(
      fc.property(
        fc.array(
          fc.record({
            db: fc.double({ min: 86, max: 100, noNaN: true }),
            min: fc.integer({ min: 30, max: 200 }),
            wornPct: fc.integer({ min: 95, max: 100 }),
          }),
          { minLength: 1, maxLength: 3 },
        ),
        (drafts) => {
          const dayWith = (audioDb: number | null) =>
            dayOf(
              ...drafts.map(({ db, min, wornPct }, index) =>
                buildTask(`t${index}`, min, buildLevel(db, { metric: STEADY }), {
                  protection: buildProtection({ usRatingDb: 29 }, { audioDb }),
                  wornPct,
                }),
              ),
            );
          const mostDb = mostAudioDb(dayWith(null), US, 85);
          if (mostDb === null) expect(atEar(dayWith(null), US)!).toBeGreaterThan(85);
          else expect(atEar(dayWith(mostDb), US)).toBeCloseTo(85, 6);
        },
      ),
      { numRuns: 60 },
    );
  });
});
